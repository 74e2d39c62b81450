/**
 * Times the transport solver against scipy's BDF on water through an 80 degree bake, the case that other work waits
 * for. Run it with `npx tsx tests/bench/bench.ts`. Pairs are interleaved, so that a busy machine slows both alike;
 * the table shows medians and the error of each against the table of check values.
 */
import { execFileSync } from 'node:child_process'
import { readFileSync } from 'node:fs'
import { runTransport } from '#app/physics/transport.ts'
import { meshNode } from '#app/physics/tube.ts'
import { caseC, HOUR_S } from '#tests/fixtures/physics/benchmark-runs.ts'

const PAIRS = 9
const script = new URL('reference.py', import.meta.url).pathname
const table = new URL('../fixtures/physics/check-values.json', import.meta.url)

interface Timing {
  seconds: number
  near: number
  far: number
}

const checks = JSON.parse(readFileSync(table, 'utf8')).checks as { id: string; expected: number[] }[]
const listed = checks.find((entry) => entry.id === 'bench.C80.480h')
if (!listed) throw new Error('The table of check values has no entry bench.C80.480h')
const [, , , near, far] = listed.expected as [number, number, number, number, number]

function ours(cells: number, tolerance: number): Timing {
  const run = caseC([480 * HOUR_S], tolerance, 353.15, 10, 150 / cells)
  const water = { ...run, gases: [run.gases[1]!] }
  const started = performance.now()
  const pressure = runTransport(water)[0]!.pressurePa[0]!
  const seconds = (performance.now() - started) / 1000
  return { seconds, near: pressure[0]!, far: pressure[meshNode(run.mesh, 'tube', 150)]! }
}

function theirs(cells: number, rtol: number): Timing {
  const output = execFileSync('python3', [script, String(cells), String(rtol)], { encoding: 'utf8' })
  return JSON.parse(output) as Timing
}

function scipyVersion(): string | null {
  try {
    return execFileSync('python3', ['-c', 'import scipy; print(scipy.__version__)'], {
      encoding: 'utf8',
    }).trim()
  } catch (error) {
    console.log(
      `scipy cannot be used here, so only our own times are shown (${(error as Error).message.split('\n')[0]})`,
    )
    return null
  }
}

function median(values: readonly number[]): number {
  return [...values].sort((a, b) => a - b)[values.length >> 1]!
}

function worst(timing: Timing): number {
  return Math.max(Math.abs(timing.near / near - 1), Math.abs(timing.far / far - 1))
}

const version = scipyVersion()
console.log(`Node ${process.version}, scipy ${version ?? 'missing'}, median of ${PAIRS} interleaved pairs`)
console.log('cells  tolerance  ours s   error    rtol   scipy s  error    scipy/ours')
for (const cells of [75, 150, 300]) {
  for (const [tolerance, rtol] of [
    [1e-3, 1e-4],
    [1e-4, 1e-6],
  ] as const) {
    ours(cells, tolerance)
    const own: Timing[] = []
    const other: Timing[] = []
    for (let pair = 0; pair < PAIRS; pair++) {
      own.push(ours(cells, tolerance))
      if (version !== null) other.push(theirs(cells, rtol))
    }
    const seconds = median(own.map((timing) => timing.seconds))
    let line = `${String(cells).padEnd(6)} ${tolerance.toExponential(0).padEnd(10)} ${seconds.toFixed(4).padEnd(8)} `
    line += worst(own[0]!).toExponential(1).padEnd(8)
    if (other.length > 0) {
      const reference = median(other.map((timing) => timing.seconds))
      line += ` ${rtol.toExponential(0).padEnd(6)} ${reference.toFixed(3).padEnd(8)} `
      line += `${worst(other[0]!).toExponential(1).padEnd(8)} ${(reference / seconds).toFixed(1)}`
    }
    console.log(line)
  }
}
