/**
 * Answers trials one after another, the newest first. What is waiting when another comes is dropped; a curve at rest
 * that is under way is given up. A coarse curve under way is finished: giving it up each time the hand moves would
 * leave the picture standing still.
 *
 * A worker hears no message while it computes, and memory shared with the page, through which it could be told to
 * stop, needs headers that cut a page off from the rest of its site. So the solution is taken in slices with a breath
 * between them, in which messages come in. Starting the worker anew would be a cancel too, but one that costs more
 * than the solution does.
 */
import type { WhatIfGround, WhatIfState } from '#app/domain/what-if.ts'
import { type WhatIfCurve, type WhatIfGrade, whatIfRefusal, whatIfSlices } from '#app/domain/what-if-solve.ts'
import { PhysicsError } from '#app/physics/errors.ts'
import { TransportError } from '#app/physics/transport.ts'

export interface WhatIfAsk {
  /** Counts up with every ask. */
  id: number
  ground: WhatIfGround
  state: WhatIfState
}

export type WhatIfAnswer =
  | { id: number; kind: 'curve'; grade: WhatIfGrade; curve: WhatIfCurve; ms: number }
  | { id: number; kind: 'refused'; message: string }

/** How long messages may have to wait, ms. */
const SLICE_MS = 6

interface SolverTies {
  post: (answer: WhatIfAnswer) => void
  /** Lets messages that have come in be heard. */
  breathe: () => Promise<void>
  /** Clock that only goes forward, ms. */
  clock: () => number
}

/** @returns takes an ask; answers come through `post`, coarse first and then at rest, for the newest ask only */
export function whatIfSolver(ties: SolverTies): (ask: WhatIfAsk) => Promise<void> {
  let waiting: WhatIfAsk | null = null
  let busy = false

  async function work(): Promise<void> {
    while (waiting !== null) {
      const ask: WhatIfAsk = waiting
      waiting = null
      try {
        await answer(ask)
      } catch (error) {
        if (!(error instanceof PhysicsError || error instanceof TransportError)) throw error
        ties.post({
          id: ask.id,
          kind: 'refused',
          message: `These numbers have no solution: ${error.message}.`,
        })
      }
    }
  }

  async function answer(ask: WhatIfAsk): Promise<void> {
    const message = whatIfRefusal(ask.ground, ask.state)
    if (message !== null) {
      ties.post({ id: ask.id, kind: 'refused', message })
      return
    }
    for (const grade of ['moving', 'at-rest'] as const) {
      const found = await solve(ask, grade)
      if (found === null) return
      ties.post({ id: ask.id, kind: 'curve', grade, ...found })
      await ties.breathe()
      if (waiting !== null) return
    }
  }

  async function solve(
    { ground, state }: WhatIfAsk,
    grade: WhatIfGrade,
  ): Promise<{ curve: WhatIfCurve; ms: number } | null> {
    const started = ties.clock()
    let since = started
    const slices = whatIfSlices(ground, state, grade)
    for (let slice = slices.next(); ; slice = slices.next()) {
      if (slice.done) return { curve: slice.value, ms: ties.clock() - started }
      if (grade === 'moving' || ties.clock() - since < SLICE_MS) continue
      await ties.breathe()
      if (waiting !== null) return null
      since = ties.clock()
    }
  }

  return async (ask) => {
    waiting = ask
    if (busy) return
    busy = true
    try {
      await work()
    } finally {
      busy = false
    }
  }
}
