/** What a reading of oxygen means for whoever is in the tunnel, and when a stretch may be opened again. Percent by volume. */

/**
 * Where no site has adopted anything: 29 CFR 1910.146(b) calls less than 19.5 % oxygen-deficient and more than 23.5 %
 * oxygen-enriched.
 */
export const PUBLISHED_OXYGEN = { low: 19.5, high: 23.5 } as const
/** Readings that release a stretch are at least this high (the site may ask for more), and hold for so long. */
export const RELEASE_PERCENT = 20
const RELEASE_MINUTES = 10
/** A newest reading older than this says nothing about the air now (our own rule). */
const RELEASE_FRESH_MINUTES = 30
const MINUTE_MS = 60_000

/** Below and above these everybody leaves. `set` says whether the site has adopted them, or nobody has. */
export interface OxygenLimits {
  low: number
  high: number
  release: number
  set: boolean
}

export type OxygenAnswer = 'low' | 'high' | 'good'

/** Judges one reading. At the limit itself it still counts as good. */
export function judgeOxygen(percent: number, limits: OxygenLimits): OxygenAnswer {
  if (percent < limits.low) return 'low'
  return percent > limits.high ? 'high' : 'good'
}

export interface OxygenReading {
  percent: number
  at: Date
  place: string
  /** Serial number or tag of the instrument. */
  instrument: string
  tester: string
  /** Why it does not count for a release (its calibration was overdue); empty where it does. */
  doubt: string
}

export interface ReleaseRun {
  ok: boolean
  /** The newest readings that all are good enough, oldest first. */
  run: OxygenReading[]
  /** What is still missing; empty when nothing is. */
  missing: string
}

/**
 * Whether the newest readings show good air for long enough: all of them from the newest back over ten minutes at
 * least, no two further apart than that, and the newest of them fresh.
 *
 * @param readings of the closed stretch since it was closed, in any order
 */
export function releaseRun(readings: readonly OxygenReading[], limits: OxygenLimits, now: Date): ReleaseRun {
  const newestFirst = [...readings].sort((a, b) => b.at.getTime() - a.at.getTime())
  const run: OxygenReading[] = []
  for (const reading of newestFirst) {
    const good = reading.percent >= limits.release && reading.percent <= limits.high
    // One of an instrument in doubt neither helps nor harms, unless it is bad: then it is taken seriously.
    if (good && reading.doubt !== '') continue
    const next = run[0]
    if (!good || (next !== undefined && minutes(reading.at, next.at) > RELEASE_MINUTES)) break
    run.unshift(reading)
  }
  const [first, last] = [run[0], run.at(-1)]
  const wanted = `${limits.release.toFixed(1)} % or more (and at most ${limits.high.toFixed(1)} %)`
  if (first === undefined || last === undefined) {
    const [newest] = newestFirst
    const why =
      newest === undefined
        ? 'There is no reading since it was closed.'
        : newest.doubt !== ''
          ? `The newest reading does not count: ${newest.doubt}`
          : `The newest reading is ${newest.percent.toFixed(1)} %.`
    return {
      ok: false,
      run,
      missing: `${why} Readings of ${wanted} over ${RELEASE_MINUTES} minutes are needed.`,
    }
  }
  const span = minutes(first.at, last.at)
  if (span < RELEASE_MINUTES) {
    return {
      ok: false,
      run,
      missing: `The last ${run.length === 1 ? 'reading' : `${run.length} readings`} of ${wanted} ${run.length === 1 ? 'stands' : 'stand'} for ${Math.floor(span)} of ${RELEASE_MINUTES} minutes. Read again, no more than ${RELEASE_MINUTES} minutes after the last.`,
    }
  }
  if (minutes(last.at, now) > RELEASE_FRESH_MINUTES) {
    return {
      ok: false,
      run,
      missing: `The newest reading is ${Math.floor(minutes(last.at, now))} minutes old; ${RELEASE_FRESH_MINUTES} is the most. Read again.`,
    }
  }
  return { ok: true, run, missing: '' }
}

function minutes(from: Date, to: Date): number {
  return (to.getTime() - from.getTime()) / MINUTE_MS
}
