/** The thread that solves trials beside the page: messages in, messages out, everything else is in the solver. */
import { type WhatIfAsk, whatIfSolver } from './what-if-solver.ts'

// A timer would be held back to four milliseconds a breath; a message to oneself is not.
const { port1, port2 } = new MessageChannel()
let wake: (() => void) | null = null
port1.onmessage = () => wake?.()

const take = whatIfSolver({
  post: (answer) => self.postMessage(answer),
  breathe: () =>
    new Promise((resolve) => {
      wake = resolve
      port2.postMessage(null)
    }),
  clock: () => performance.now(),
})

self.onmessage = ({ data }: MessageEvent<WhatIfAsk>) => {
  take(data).catch((error: unknown) => {
    // Out of the promise, so that the page hears of it by its error event.
    setTimeout(() => {
      throw error
    })
  })
}
