/**
 * How much longer do forty bakes take than sixteen? Each builds the same number of schedules on half a year; runs are
 * interleaved and the table shows medians. Run with `npx tsx tests/bench/schedule.ts`.
 */
import { solve } from '#app/domain/schedule/solve.ts'
import { halfYear } from '#tests/unit/schedule/long-problems.ts'

const RUNS = 3
const BUDGET = 15

function seconds(count: number): number {
  const problem = halfYear(count)
  const began = performance.now()
  const found = solve(problem, [], 'earliest-finish', { seed: 1, budget: BUDGET })
  if (found === null || found.unplaced.length > 0) throw new Error(`not all of ${count} bakes have a place`)
  return (performance.now() - began) / 1000
}

function median(values: readonly number[]): number {
  return [...values].sort((a, b) => a - b)[values.length >> 1] ?? Number.NaN
}

const times = Array.from({ length: RUNS }, () => [seconds(16), seconds(40)] as const)
const few = median(times.map(([one]) => one))
const many = median(times.map(([, other]) => other))
const growth = Math.log(many / few) / Math.log(40 / 16)
console.log(
  `16 bakes ${few.toFixed(2)} s, 40 bakes ${many.toFixed(2)} s: ${(many / few).toFixed(1)} times, count to the power ${growth.toFixed(2)}`,
)
if (growth > 2) {
  console.log('More than quadratic growth')
  process.exitCode = 1
}
