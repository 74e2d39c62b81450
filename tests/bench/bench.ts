/**
 * How fast is the transport solver? Against scipy's BDF on the same nodes, each side at its loosest tolerance that
 * stays within half a percent wherever there is pressure worth the name; and by itself on a long line with six gases.
 * Pairs are interleaved, so that a busy machine slows both alike, and the table shows medians. Run with
 * `npm run bench`, which goes on with the log intake (intake.ts) and mail (mail.ts); the comparison needs python3 with
 * scipy (python3-scipy on Debian).
 */
import { spawnSync } from 'node:child_process'
import { type GasHistory, runTransport, type TransportRun } from '#app/physics/transport.ts'
import { caseB, caseC, DAY_S, HOUR_S, longLine } from '#tests/fixtures/physics/benchmark-runs.ts'
import { type Reference, type ReferenceAsk, startReference } from './reference-process.ts'
import { benchWhatIf } from './what-if.ts'

const PAIRS = 9
/** Half a percent where p is above this counts as right, Pa. */
const WORTH_PA = 1e-7
const RIGHT = 0.005
const TOLERANCES = [0.1, 0.05, 0.03, 0.02, 0.01, 7e-3, 5e-3, 3e-3, 2e-3, 1e-3, 5e-4]
const RTOLS = [0.1, 0.05, 0.03, 0.02, 0.01, 5e-3, 3e-3, 2e-3, 1e-3, 5e-4, 3e-4, 2e-4, 1e-4, 3e-5, 1e-5]

interface Contest {
  name: string
  case: 'B1' | 'C'
  cells: number
  /** How many times faster is asked for. */
  wanted: number
  outputs: readonly number[]
  run(tolerance: number): TransportRun
}

const DAYS_B = [1 / 12, 0.5, 1, 5, 10, 15, 20, 30].map((days) => days * DAY_S)
const HOURS_C = [1, 12, 24, 37, 50, 74, 170, 290, 303, 316, 480].map((hours) => hours * HOUR_S)

const contests: readonly Contest[] = [
  {
    name: 'B1, eight pumps on 2 km',
    case: 'B1',
    cells: 800,
    wanted: 10,
    outputs: DAYS_B,
    run: (tolerance) => caseB(DAYS_B, tolerance, false, 2.5),
  },
  {
    name: 'C, water through a bake',
    case: 'C',
    cells: 150,
    wanted: 2,
    outputs: HOURS_C,
    run(tolerance) {
      const run = caseC(HOURS_C, tolerance, 423.15)
      return { ...run, gases: [run.gases[1]!] }
    },
  },
]

function median(values: readonly number[]): number {
  return [...values].sort((a, b) => a - b)[values.length >> 1]!
}

/** Largest share by which pressures miss the converged ones, where there is pressure worth the name. */
function worst(found: readonly ArrayLike<number>[], converged: readonly ArrayLike<number>[]): number {
  let largest = 0
  for (const [k, row] of converged.entries()) {
    for (let i = 0; i < row.length; i++) {
      if (row[i]! > WORTH_PA) largest = Math.max(largest, Math.abs(found[k]![i]! / row[i]! - 1))
    }
  }
  return largest
}

/** Repeated until it takes about as long as the other side, so that one interruption does not decide; mean time. */
function timedAtLength(run: TransportRun, aboutS: number): { seconds: number; histories: GasHistory[] } {
  const started = performance.now()
  let result = timed(run)
  let count = 1
  while (performance.now() - started < 1000 * aboutS) {
    result = timed(run)
    count++
  }
  return { seconds: (performance.now() - started) / 1000 / count, histories: result.histories }
}

function timed(run: TransportRun): { seconds: number; cpuSeconds: number; histories: GasHistory[] } {
  const started = performance.now()
  const cpu = process.cpuUsage()
  const histories = runTransport(run)
  const { user, system } = process.cpuUsage(cpu)
  return { seconds: (performance.now() - started) / 1000, cpuSeconds: (user + system) / 1e6, histories }
}

async function contest(asked: Contest, reference: Reference | null): Promise<void> {
  const ask = (rtol: number) => {
    const request: ReferenceAsk = { case: asked.case, cells: asked.cells, rtol, outputs: asked.outputs }
    return reference!.ask(request)
  }
  // Converged by our own solver; where scipy is there, it must agree, or nothing below means anything.
  const converged = runTransport(asked.run(1e-6))[0]!.pressurePa
  let agreement = 'no second opinion'
  if (reference) {
    const apart = worst((await ask(1e-9)).pressurePa, converged)
    if (apart > 1e-3)
      throw new Error(`${asked.name}: both converged answers differ by ${(100 * apart).toFixed(2)} %`)
    agreement = `both converged answers agree to ${apart.toExponential(0)}`
  }
  console.log(`\n${asked.name}: ${asked.cells} cells, ${asked.outputs.length} outputs; ${agreement}`)

  const tolerance = TOLERANCES.find(
    (tol) => worst(runTransport(asked.run(tol))[0]!.pressurePa, converged) < RIGHT,
  )
  if (tolerance === undefined) throw new Error(`${asked.name}: no tolerance of ours is within half a percent`)
  // Until the just-in-time compiler has had its say.
  timedAtLength(asked.run(tolerance), 1.5)
  if (!reference) {
    const own = Array.from({ length: PAIRS }, () => timed(asked.run(tolerance)))
    report(
      'ours',
      tolerance,
      median(own.map(({ seconds }) => seconds)),
      worst(own[0]!.histories[0]!.pressurePa, converged),
    )
    return
  }
  let rtol = 0
  for (const candidate of RTOLS) {
    if (worst((await ask(candidate)).pressurePa, converged) >= RIGHT) continue
    rtol = candidate
    break
  }
  if (rtol === 0) throw new Error(`${asked.name}: no tolerance of scipy is within half a percent`)
  const ratios: number[] = []
  const own: number[] = []
  const other: number[] = []
  let ownError = 0
  let otherError = 0
  for (let pair = 0; pair < PAIRS; pair++) {
    const theirs = await ask(rtol)
    const mine = timedAtLength(asked.run(tolerance), theirs.seconds)
    own.push(mine.seconds)
    other.push(theirs.seconds)
    ratios.push(theirs.seconds / mine.seconds)
    ownError = worst(mine.histories[0]!.pressurePa, converged)
    otherError = worst(theirs.pressurePa, converged)
  }
  report('ours', tolerance, median(own), ownError)
  report('scipy', rtol, median(other), otherError)
  const ratio = median(ratios)
  console.log(
    `  scipy/ours ${ratio.toFixed(1)} (pairs ${Math.min(...ratios).toFixed(1)} to ${Math.max(...ratios).toFixed(1)}), ` +
      `asked for ${asked.wanted}: ${ratio >= asked.wanted ? 'met' : 'MISSED'}`,
  )
}

function report(side: string, tolerance: number, seconds: number, error: number): void {
  console.log(
    `  ${side.padEnd(6)} tolerance ${tolerance.toExponential(0)}  ${(1000 * seconds).toFixed(1).padStart(7)} ms  ` +
      `error ${(100 * error).toFixed(2)} %`,
  )
}

/** Six gases over 60 days with 30 hot: how long, and how processor time grows with the cells. */
function growth(): void {
  const tolerance = 7e-3
  const small = longLine(1000, tolerance)
  const large = longLine(2000, tolerance)
  timed(small)
  timed(large)
  const one: number[] = []
  const two: number[] = []
  const ratios: number[] = []
  let last: GasHistory[] = []
  for (let pair = 0; pair < PAIRS; pair++) {
    const first = timed(small)
    const second = timed(large)
    one.push(first.seconds)
    two.push(second.seconds)
    ratios.push(second.cpuSeconds / first.cpuSeconds)
    last = first.histories
  }
  const close = runTransport(longLine(1000, tolerance / 100))
  const steps = last.reduce((sum, history) => sum + history.steps, 0)
  const error = Math.max(...last.map((history, gas) => worst(history.pressurePa, close[gas]!.pressurePa)))
  const mass = Math.max(...last.map((history) => history.massError))
  const ratio = median(ratios)
  console.log('\nLong line: 6 gases, water on the wall, 60 days with a bake of 30')
  console.log(
    `  1000 cells  ${(1000 * median(one)).toFixed(0)} ms, ${steps} steps, mass closes to ${mass.toExponential(0)}`,
  )
  console.log(
    `  error ${(100 * error).toFixed(2)} % against a hundredth of the tolerance, where p > ${WORTH_PA} Pa`,
  )
  console.log(`  2000 cells  ${(1000 * median(two)).toFixed(0)} ms`)
  console.log(
    `  2000/1000 cells ${ratio.toFixed(2)}, asked for at most 2.4: ${ratio <= 2.4 ? 'met' : 'MISSED'}`,
  )
}

const found = await startReference()
const reference = 'missing' in found ? null : found
console.log(`Node ${process.version}; medians of ${PAIRS} interleaved pairs`)
if ('missing' in found) {
  console.log(
    `scipy is missing, so only our own times are shown (${found.missing}); python3-scipy would bring it`,
  )
} else {
  console.log(`scipy ${found.scipy}, BDF: a banded Jacobian for B1, differences on the sparsity for C`)
}
try {
  for (const asked of contests) await contest(asked, reference)
  growth()
} finally {
  reference?.close()
}

await benchWhatIf()

// In processes of their own, so that no bench leaves another its memory.
for (const file of ['tests/bench/intake.ts', 'tests/bench/mail.ts']) {
  const { status } = spawnSync(process.execPath, ['--import', 'tsx', file], { stdio: 'inherit' })
  if (status !== 0) process.exitCode = 1
}
