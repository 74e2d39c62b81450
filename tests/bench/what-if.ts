/**
 * How fast does a trial of a segment follow the hand? The page's own worker in Chromium against the same solution in
 * Node, and how many curves a second it gives while the numbers never rest. Run with `npm run bench`; needs Chromium.
 */
import { createServer, type Server } from 'node:http'
import type { AddressInfo } from 'node:net'
import type { Page } from 'playwright-core'
import { build } from 'vite'
import type { WhatIfAnswer, WhatIfAsk } from '#app/components/what-if/what-if-solver.ts'
import { usualState, type WhatIfState } from '#app/domain/what-if.ts'
import { type WhatIfCurve, whatIfSlices } from '#app/domain/what-if-solve.ts'
import { wetGround } from '#tests/fixtures/what-if-grounds.ts'
import { launchBrowser } from '#tests/support/browser.ts'

const PAIRS = 9
const HAND_MS = 3000

/** Runs the comparison and prints it. */
export async function benchWhatIf(): Promise<void> {
  const server = await serveWorker()
  const browser = await launchBrowser()
  try {
    const page = await browser.newPage()
    await page.goto(`http://127.0.0.1:${(server.address() as AddressInfo).port}/`)
    const usual = usualState(wetGround)
    await contest(page, 'pump-down, 150 cells, 2 gases, 30 days', usual)
    await contest(page, 'bake with the isotherm, 150 cells, 2 gases', { ...usual, mode: 'bake' })
  } finally {
    await browser.close()
    server.close()
  }
}

async function contest(page: Page, name: string, state: WhatIfState): Promise<void> {
  // Until both compilers have had their say.
  for (let round = 0; round < 4; round += 1) {
    await solveInWorker(page, state)
    solveHere(state)
  }
  const ratios: number[] = []
  const worker: number[] = []
  const here: number[] = []
  let apart = 0
  for (let pair = 0; pair < PAIRS; pair += 1) {
    const theirs = await solveInWorker(page, state)
    const ours = solveHere(state)
    worker.push(theirs.ms)
    here.push(ours.ms)
    ratios.push(theirs.ms / ours.ms)
    apart = Math.max(...theirs.curve.pa.map((pa, at) => Math.abs(pa / (ours.curve.pa[at] ?? Number.NaN) - 1)))
  }
  const ratio = median(ratios)
  console.log(`\nWhat if: ${name}`)
  console.log(
    `  worker ${median(worker).toFixed(1)} ms, Node ${median(here).toFixed(1)} ms, ratio ${ratio.toFixed(2)}, ` +
      `asked for at most 1.5: ${ratio <= 1.5 ? 'met' : 'MISSED'}`,
  )
  console.log(
    `  both curves agree to ${apart.toExponential(0)}, asked for 5e-3: ${apart <= 0.005 ? 'met' : 'MISSED'}`,
  )
  const perSecond = await followHand(page, state)
  console.log(`  ${perSecond.toFixed(0)} curves a second while the numbers never rest`)
}

function solveHere(state: WhatIfState): { ms: number; curve: WhatIfCurve } {
  const started = performance.now()
  const slices = whatIfSlices(wetGround, state, 'at-rest')
  for (let slice = slices.next(); ; slice = slices.next()) {
    if (slice.done) return { ms: performance.now() - started, curve: slice.value }
  }
}

/** One trial to the end; its time is the worker's own, breaths between the slices included. */
function solveInWorker(page: Page, state: WhatIfState): Promise<{ ms: number; curve: WhatIfCurve }> {
  return page.evaluate(
    (ask) =>
      new Promise<{ ms: number; curve: WhatIfCurve }>((resolve, reject) => {
        const { worker } = globalThis as unknown as { worker: Worker }
        worker.onmessage = ({ data }: MessageEvent<WhatIfAnswer>) => {
          if (data.kind === 'refused') reject(new Error(data.message))
          else if (data.grade === 'at-rest') resolve({ ms: data.ms, curve: data.curve })
        }
        worker.onerror = ({ message }) => reject(new Error(message))
        worker.postMessage(ask)
      }),
    { id: 1, ground: wetGround, state } satisfies WhatIfAsk,
  )
}

/** Asks anew with every answer, as a hand that never rests does; answers a second. */
function followHand(page: Page, state: WhatIfState): Promise<number> {
  return page.evaluate(
    ([first, lastsMs]) =>
      new Promise<number>((resolve) => {
        const { worker } = globalThis as unknown as { worker: Worker }
        const started = performance.now()
        let answers = 0
        worker.onmessage = () => {
          answers += 1
          const gone = performance.now() - started
          if (gone >= lastsMs) {
            resolve((1000 * answers) / gone)
            return
          }
          const speed = first.state.numbers.speed * (1 + 0.5 * Math.sin(answers / 5))
          const numbers = { ...first.state.numbers, speed }
          worker.postMessage({ ...first, id: answers + 1, state: { ...first.state, numbers } })
        }
        worker.postMessage(first)
      }),
    [{ id: 1, ground: wetGround, state } satisfies WhatIfAsk, HAND_MS] as const,
  )
}

/** The page's worker, bundled as the product's build does, behind a page that starts it. */
async function serveWorker(): Promise<Server> {
  const built = await build({
    configFile: false,
    logLevel: 'error',
    build: {
      write: false,
      lib: { entry: 'app/components/what-if/what-if-worker.ts', formats: ['es'], fileName: 'worker' },
      minify: true,
    },
  })
  const [result] = Array.isArray(built) ? built : [built]
  if (result === undefined || !('output' in result)) throw new Error('The bundler gave no files.')
  const chunk = result.output.find((one) => one.type === 'chunk')
  if (chunk?.type !== 'chunk') throw new Error('The bundler gave no code.')
  const { code } = chunk
  const server = createServer((request, response) => {
    const script = request.url === '/worker.js'
    response.setHeader('Content-Type', script ? 'text/javascript' : 'text/html')
    response.end(
      script ? code : '<script>globalThis.worker = new Worker("/worker.js", { type: "module" })</script>',
    )
  })
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve))
  return server
}

function median(values: readonly number[]): number {
  return [...values].sort((a, b) => a - b)[values.length >> 1] ?? Number.NaN
}
