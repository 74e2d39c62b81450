/**
 * How far apart the clocks of two sources are, from steps that both have seen: a valve that opens, a pump that trips.
 * The answer is a proposal for a person, with what it may be wrong by; too little to go by is said and not guessed.
 *
 * Which figures make a step, and how many steps suffice, are our own rules.
 */
import { median } from '../physics/statistics.ts'

/** A positive reading, by the clock of its own source. */
export interface ClockSample {
  atMs: number
  value: number
}

export type ClockComparison =
  | { kind: 'estimate'; offsetMs: number; uncertaintyMs: number; steps: number }
  | { kind: 'too-little'; text: string }

/** A change by this factor from one reading to the next is a step. */
const STEP_FACTOR = 2
/** Over a longer gap nobody knows when the change came. */
const LONGEST_GAP_MS = 600_000
const FEWEST_STEPS = 3
/** Of the steps that the source with fewer has seen, so many must fit. */
const FITTING_PART = 0.6

interface Step {
  /** Middle of the two readings between which it came. */
  atMs: number
  /** Half of the time between them. */
  halfMs: number
  up: boolean
}

function stepsOf(samples: readonly ClockSample[]): Step[] {
  const steps: Step[] = []
  const sorted = samples.filter(({ value }) => value > 0).toSorted((a, b) => a.atMs - b.atMs)
  for (const [i, now] of sorted.entries()) {
    const before = sorted[i - 1]
    if (before === undefined || now.atMs - before.atMs > LONGEST_GAP_MS) continue
    const factor = now.value / before.value
    if (factor < STEP_FACTOR && factor > 1 / STEP_FACTOR) continue
    steps.push({
      atMs: (now.atMs + before.atMs) / 2,
      halfMs: (now.atMs - before.atMs) / 2,
      up: factor > 1,
    })
  }
  return steps
}

/** Offsets of the steps that fit when the other clock is taken to be ahead by about so much, one for each own step. */
function fitting(own: readonly Step[], other: readonly Step[], aboutMs: number): Fit[] {
  const free = new Set(other)
  const fits: Fit[] = []
  for (const step of own) {
    for (const candidate of free) {
      const toleranceMs = step.halfMs + candidate.halfMs
      const offsetMs = candidate.atMs - step.atMs
      if (candidate.up !== step.up || Math.abs(offsetMs - aboutMs) > toleranceMs) continue
      free.delete(candidate)
      fits.push({ offsetMs, toleranceMs })
      break
    }
  }
  return fits
}

interface Fit {
  offsetMs: number
  toleranceMs: number
}

/**
 * The other source's time minus the own one's, in milliseconds: what has to be added to the own times if the other
 * clock is right. `uncertaintyMs` is the larger of the spread of the steps and the time between readings around them.
 *
 * @param mostMs offsets beyond this are not looked for
 */
export function compareClocks(
  own: readonly ClockSample[],
  other: readonly ClockSample[],
  mostMs: number,
): ClockComparison {
  const [mine, theirs] = [stepsOf(own), stepsOf(other)]
  const fewest = Math.min(mine.length, theirs.length)
  if (fewest < FEWEST_STEPS) {
    return {
      kind: 'too-little',
      text: `One source shows ${mine.length} and the other ${theirs.length} steps by a factor of ${STEP_FACTOR}; at least ${FEWEST_STEPS} that both have seen are needed. Choose a longer time, or one with valves moving.`,
    }
  }
  const offsets = mine
    .flatMap((step) => theirs.map(({ atMs }) => atMs - step.atMs))
    .filter((offset) => Math.abs(offset) <= mostMs)
  const tried = offsets
    .map((aboutMs) => ({ aboutMs, fits: fitting(mine, theirs, aboutMs) }))
    .toSorted((a, b) => b.fits.length - a.fits.length)
  const best = tried[0]
  if (best === undefined || best.fits.length < Math.max(FEWEST_STEPS, FITTING_PART * fewest)) {
    return {
      kind: 'too-little',
      text: `At no offset do enough steps fit: ${best?.fits.length ?? 0} of ${fewest}. The two may not have seen the same.`,
    }
  }
  const widest = Math.max(...best.fits.map(({ toleranceMs }) => toleranceMs))
  const rival = tried.find(
    ({ aboutMs, fits }) => fits.length === best.fits.length && Math.abs(aboutMs - best.aboutMs) > 2 * widest,
  )
  if (rival !== undefined) {
    return {
      kind: 'too-little',
      text: 'Two different offsets fit equally well, as with steps at equal intervals. Choose a longer time.',
    }
  }
  const offsetMs = median(best.fits.map((fit) => fit.offsetMs))
  const spread = Math.max(...best.fits.map((fit) => Math.abs(fit.offsetMs - offsetMs)))
  return {
    kind: 'estimate',
    offsetMs: Math.round(offsetMs),
    uncertaintyMs: Math.ceil(Math.max(spread, widest)),
    steps: best.fits.length,
  }
}
