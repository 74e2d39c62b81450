/**
 * How often does the 80 % range hold? Trials come from a tube that is not the model behind the forecast: its exponent
 * drifts, its clock is off by minutes, it may keep a floor, it follows the hall by day and its noise has a memory.
 * Run with `npx tsx tests/soak/forecast-coverage.ts` for 500 trials.
 */
import { forecastTimeToTarget } from '#app/physics/forecast.ts'

export interface Coverage {
  trials: number
  forecasts: number
  inside: number
  early: number
  late: number
  refused: Record<string, number>
  /** Median of half the range over the time still to go. */
  medianHalfWidth: number
}

interface Trial {
  hours: number[]
  pa: number[]
  targetPa: number
  truthHours: number
  endHours: number
}

/** Count hits of the range over `trials` seeded trials. */
export function forecastCoverage(trials: number, seed: number): Coverage {
  const random = seeded(seed)
  const refused: Record<string, number> = {}
  const widths: number[] = []
  const count = { forecasts: 0, inside: 0, early: 0, late: 0 }
  for (let i = 0; i < trials; i++) {
    const trial = makeTrial(random)
    const answer = forecastTimeToTarget(trial, { targetPa: trial.targetPa })
    if (answer.kind === 'refused') {
      refused[answer.reason] = (refused[answer.reason] ?? 0) + 1
      continue
    }
    count.forecasts++
    if (trial.truthHours < answer.low) count.early++
    else if (trial.truthHours > answer.high) count.late++
    else count.inside++
    widths.push((answer.high - answer.low) / 2 / (trial.truthHours - trial.endHours))
  }
  widths.sort((a, b) => a - b)
  return { trials, ...count, refused, medianHalfWidth: widths[widths.length >> 1] ?? Number.NaN }
}

function makeTrial(random: () => number): Trial {
  const normal = (): number => Math.sqrt(-2 * Math.log(1 - random())) * Math.cos(2 * Math.PI * random())
  const endHours = 24 * 6 ** random()
  const exponent = 1 + 0.08 * normal()
  const bend = 0.015 * normal()
  const clockError = 0.3 * (random() - 0.3)
  const level = 1.6e-3 * Math.exp(normal())
  const trend = (t: number): number => {
    const x = Math.log(t + clockError)
    return Math.exp(Math.log(level) - exponent * x - bend * (x - 3) ** 2)
  }
  const ahead = endHours * (1.3 + 1.7 * random())
  const floor = random() < 0.5 ? 0 : 0.4 * random() * trend(ahead)
  const swing = 0.04 * random()
  const phase = 2 * Math.PI * random()
  const noise = 0.01 + 0.03 * random()
  const memoryHours = 0.2 + 5 * random() ** 2
  const spacing = 0.25
  const keep = Math.exp(-spacing / memoryHours)
  let wander = normal()
  const hours: number[] = []
  const pa: number[] = []
  for (let t = 0.25; t <= endHours; t += spacing) {
    wander = keep * wander + Math.sqrt(1 - keep * keep) * normal()
    const day = swing * Math.sin((2 * Math.PI * t) / 24 + phase)
    const read = (trend(t) + floor) * Math.exp(day + noise * wander)
    hours.push(t)
    // A display with three digits.
    pa.push(Number(read.toPrecision(3)))
  }
  return { hours, pa, targetPa: trend(ahead) + floor, truthHours: ahead, endHours }
}

// Mulberry's 32-bit generator: the same trials on every machine.
function seeded(seed: number): () => number {
  let state = seed >>> 0
  return () => {
    state = (state + 0x6d2b79f5) >>> 0
    let t = state
    t = Math.imul(t ^ (t >>> 15), t | 1)
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61)
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296
  }
}

if (process.argv[1]?.endsWith('forecast-coverage.ts')) {
  const coverage = forecastCoverage(500, 20261109)
  const share = coverage.inside / coverage.forecasts
  console.log(JSON.stringify(coverage, null, 2))
  console.log(
    `The 80 % range held in ${(100 * share).toFixed(1)} % of ${coverage.forecasts} forecasts; 75 to 85 wanted`,
  )
  if (share < 0.75 || share > 0.85 || coverage.forecasts < 450) process.exitCode = 1
}
