/**
 * Forecasts of record: what is kept of one, how it came out, and what the record of hits says. Pure.
 *
 * A forecast is judged by its own 80 % range alone. What cannot be judged fairly, because somebody handled the segment
 * or readings are missing where they decide, is spoiled and counts neither way.
 */
import { z } from 'zod'
import type { ForecastOutcome } from './planning.ts'

/** The fit behind a forecast, kept as it was. Hours count from the start of high vacuum; pressures as the gauge reads. */
export const ForecastModelSchema = z.object({
  gauge: z.string(),
  hours: z.number().positive(),
  lowHours: z.number().positive(),
  highHours: z.number().positive(),
  windowHours: z.tuple([z.number(), z.number()]),
  /** Whether a person chose the window. */
  windowChosen: z.boolean(),
  alpha: z.number(),
  alphaSe: z.number(),
  floorPa: z.number().nullable(),
  floorUpperPa: z.number(),
  points: z.int(),
  rmsLn: z.number(),
})

/** How many of the last ones the record of hits speaks of. */
const HITS_COUNTED = 20

/** The pressure counts as reached when so many steps in a row lie at or below it. */
const STEPS_BELOW = 3

export interface Judged {
  outcome: Exclude<ForecastOutcome, 'open'>
  /** Null where the pressure was not reached. */
  reachedAt: Date | null
  /** Why it is spoiled, or late without having been reached; empty otherwise. */
  reason: string
}

export interface JudgedForecast {
  madeAt: Date
  targetPa: number
  lowAt: Date
  /** Null for a range without an end. */
  highAt: Date | null
}

/**
 * Judges a forecast, or leaves it open (null) until there is more to go by.
 *
 * @param steps mean pressures after the forecast was made, oldest first; steps without readings are absent
 * @param handled what was done to the segment after that, oldest first
 * @param stepMs length of a step; a hole is anything longer than two
 */
export function judgeForecast(
  forecast: JudgedForecast,
  steps: readonly { at: Date; pa: number }[],
  handled: readonly { at: Date; what: string }[],
  stepMs: number,
): Judged | null {
  const { targetPa, lowAt, highAt } = forecast
  const spoiling = handled.find(({ at }) => at > forecast.madeAt)
  const quiet = steps.filter(({ at }) => at > forecast.madeAt && (spoiling === undefined || at < spoiling.at))
  const first = quiet.findIndex(
    (_, index) =>
      index + STEPS_BELOW <= quiet.length &&
      quiet.slice(index, index + STEPS_BELOW).every(({ pa }) => pa <= targetPa),
  )
  const reached = quiet[first]
  if (reached !== undefined) {
    const before = quiet[first - 1]?.at ?? forecast.madeAt
    const hole = reached.at.getTime() - before.getTime() > 2 * stepMs
    if (hole && [lowAt, highAt].some((edge) => edge !== null && before < edge && edge < reached.at)) {
      return {
        outcome: 'spoiled',
        reachedAt: reached.at,
        reason: 'No readings while an end of the range went by; on which side it was reached cannot be told',
      }
    }
    return { outcome: sideOf(reached.at, lowAt, highAt), reachedAt: reached.at, reason: '' }
  }
  const last = quiet.at(-1)
  if (highAt !== null && last !== undefined && last.at > highAt) {
    return { outcome: 'late', reachedAt: null, reason: 'Not reached when the range ended' }
  }
  if (spoiling === undefined) return null
  return {
    outcome: 'spoiled',
    reachedAt: null,
    reason: `Handled before it could come true: ${spoiling.what}`,
  }
}

function sideOf(at: Date, lowAt: Date, highAt: Date | null): 'inside' | 'early' | 'late' {
  if (at < lowAt) return 'early'
  return highAt === null || at <= highAt ? 'inside' : 'late'
}

export interface HitRecord {
  /** Judged and not spoiled, at most the last twenty. */
  of: number
  inside: number
  early: number
  late: number
  spoiled: number
  open: number
}

/** Counts the last judged forecasts; those spoiled or open are counted apart, over all. */
export function hitRecord(
  outcomes: readonly { outcome: ForecastOutcome; judgedAt: Date | null }[],
): HitRecord {
  const count = (all: readonly { outcome: ForecastOutcome }[], outcome: ForecastOutcome) =>
    all.filter((one) => one.outcome === outcome).length
  const last = outcomes
    .filter(({ outcome }) => outcome !== 'open' && outcome !== 'spoiled')
    .toSorted((a, b) => (b.judgedAt?.getTime() ?? 0) - (a.judgedAt?.getTime() ?? 0))
    .slice(0, HITS_COUNTED)
  return {
    of: last.length,
    inside: count(last, 'inside'),
    early: count(last, 'early'),
    late: count(last, 'late'),
    spoiled: count(outcomes, 'spoiled'),
    open: count(outcomes, 'open'),
  }
}

/** The record of hits in a sentence. */
export function hitWords({ of, inside, early, late }: HitRecord): string {
  if (of === 0) return 'No forecast of record has been judged yet.'
  const missed = [early > 0 ? `${early} came early` : '', late > 0 ? `${late} late` : '']
    .filter(Boolean)
    .join(', ')
  const all = of === 1 ? 'The last forecast of record' : `Of the last ${of} forecasts of record, ${inside}`
  const hit =
    of === 1
      ? inside === 1
        ? 'came true inside its 80 % range'
        : 'missed its 80 % range'
      : 'came true inside their 80 % range'
  return `${all} ${hit}${missed === '' || of === 1 ? '' : ` (${missed})`}.`
}

export const OUTCOME_WORDS: Record<ForecastOutcome, string> = {
  open: 'open',
  inside: 'inside its range',
  early: 'early',
  late: 'late',
  spoiled: 'spoiled',
}
