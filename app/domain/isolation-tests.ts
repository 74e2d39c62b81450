/**
 * Isolation tests: what a recorded one holds, how it stands against its limit, and where a window of readings has to
 * end because the segment was handled. Pure.
 */
import { z } from 'zod'
import { ION_SENSITIVITY } from '../physics/gauges.ts'
import { analyseIsolation, type IsolationResult } from '../physics/isolation.ts'
import { SEGMENT_STATES, type SegmentState } from './segment-states.ts'

const pair = z.tuple([z.number(), z.number()])

const SHAPES = [
  'steady',
  'saturating',
  'both',
  'too-short',
  'no-rise',
] as const satisfies readonly IsolationResult['kind'][]

/** What the fit of a window said, kept as it was when the test was recorded. Pressures as the gauge reads them. */
export const IsolationFindingSchema = z.object({
  /** Tag of the gauge. */
  gauge: z.string(),
  kind: z.enum(SHAPES),
  points: z.int().min(1),
  /** The readings were averaged over so many seconds. */
  binSeconds: z.number().positive(),
  firstPa: z.number().positive(),
  lastPa: z.number().positive(),
  ratePaPerHour: z.number(),
  rateSePaPerHour: z.number().nonnegative(),
  volumeM3: z.number().positive(),
  /** Nitrogen-equivalent, with 95 % limits. */
  throughputPaM3S: z.number(),
  throughputSePaM3S: z.number().nonnegative(),
  throughput95PaM3S: pair,
  firstThroughputPaM3S: z.number(),
  /** The same throughput if all of it is hydrogen. */
  hydrogenPaM3S: z.number(),
  bend: z.object({ risePa: z.number(), tauHours: z.number().positive() }).nullable(),
  rmsRelative: z.number().nonnegative(),
  /** Coldest and warmest mean of the thermocouples within the window; null where they say nothing. */
  temperatureC: z.object({ low: z.number(), high: z.number() }).nullable(),
})
export type IsolationFinding = z.infer<typeof IsolationFindingSchema>

/** One averaged reading of an isolation. */
export interface IsolationPoint {
  at: Date
  pa: number
}

/**
 * Fits a window of readings. The throughput is given as the gauge reads it and as hydrogen would have to be for it.
 *
 * @throws IsolationDataError (physics) on fewer than eight readings or a fall of the pressure in between
 */
export function fitIsolation(
  points: readonly IsolationPoint[],
  segment: {
    gauge: string
    volumeM3: number
    binSeconds: number
    temperatureC: IsolationFinding['temperatureC']
  },
): IsolationFinding {
  const began = points[0]?.at.getTime() ?? 0
  const result = analyseIsolation({
    seconds: points.map(({ at }) => (at.getTime() - began) / 1000),
    pa: points.map(({ pa }) => pa),
    volumeM3: segment.volumeM3,
  })
  const { bend } = result
  return {
    ...segment,
    kind: result.kind,
    points: result.points,
    firstPa: points[0]?.pa ?? Number.NaN,
    lastPa: points.at(-1)?.pa ?? Number.NaN,
    ratePaPerHour: result.ratePaS * 3600,
    rateSePaPerHour: result.rateSePaS * 3600,
    throughputPaM3S: result.throughputPaM3S,
    throughputSePaM3S: result.throughputSePaM3S,
    throughput95PaM3S: result.throughput95PaM3S,
    firstThroughputPaM3S: result.firstThroughputPaM3S,
    hydrogenPaM3S: result.throughputPaM3S / ION_SENSITIVITY.H2,
    bend: bend === null ? null : { risePa: bend.risePa, tauHours: bend.tauS / 3600 },
    rmsRelative: result.rmsRelative,
  }
}

/** How the straight rise stands against the limit, its doubt (95 %, both sides) counted. */
export type LimitAnswer = 'within' | 'over' | 'cannot-tell'

/** Compare the rise with a limit in Pa/h. A bend too slow for its window leaves the straight part open. */
export function againstLimit(finding: IsolationFinding, limitPaPerHour: number): LimitAnswer {
  const doubt = 2 * finding.rateSePaPerHour
  if (finding.kind === 'too-short') return 'cannot-tell'
  if (finding.ratePaPerHour + doubt <= limitPaPerHour) return 'within'
  return finding.ratePaPerHour - doubt > limitPaPerHour ? 'over' : 'cannot-tell'
}

/** What the form of the curve speaks for. */
export const SHAPE_WORDS: Record<IsolationResult['kind'], string> = {
  steady: 'Straight: a leak, or hydrogen from the steel, which looks the same within a day',
  saturating: 'Bends over: gas that the walls take back, no leak to be seen',
  both: 'A bend and a straight part: gas from the walls beside a leak or hydrogen',
  'too-short': 'Bends, but the window is too short to tell a straight part from it',
  'no-rise': 'No rise that stands out from the scatter',
}

/** Something that ends an isolation. */
export interface Opening {
  at: Date
  /** In words, such as "state set to Pumping". */
  what: string
}

/** Wait between the closing and the first reading that counts, unless somebody chooses: the valve's own gas settles. */
const SETTLE_MS = 3_600_000

/** States set and pumps placed after the valve was closed, oldest first, until an instant. */
export function openingsOf(
  closedAt: Date,
  until: Date,
  handled: {
    states: readonly { state: SegmentState; since: Date }[]
    pumps: readonly { tag: string; startsAt: Date }[]
  },
): Opening[] {
  const inside = (at: Date) => at > closedAt && at <= until
  return [
    ...handled.states
      .filter(({ state, since }) => state !== 'isolated-test' && inside(since))
      .map(({ state, since }) => ({ at: since, what: `state set to "${SEGMENT_STATES[state].label}"` })),
    ...handled.pumps
      .filter(({ startsAt }) => inside(startsAt))
      .map(({ tag, startsAt }) => ({ at: startsAt, what: `${tag} put on the segment` })),
  ].sort((a, b) => a.at.getTime() - b.at.getTime())
}

/** The longest window before an opening: from where it was asked, or from an hour after the closing where that is too late. */
export function windowBefore(
  opening: Date,
  asked: { closedAt: Date; fitFrom: Date },
): { from: Date; to: Date } {
  const settled = new Date(asked.closedAt.getTime() + SETTLE_MS)
  const from = asked.fitFrom < opening ? asked.fitFrom : settled < opening ? settled : asked.closedAt
  // To the minute, and before the valve moved.
  return { from, to: new Date(Math.floor((opening.getTime() - 1) / 60_000) * 60_000) }
}

/** The window that a test is fitted on unless somebody chooses: all of the isolation but its first hour. */
export function usualWindow(closedAt: Date, end: Date): { from: Date; to: Date } {
  const settled = new Date(closedAt.getTime() + SETTLE_MS)
  return { from: settled < end ? settled : closedAt, to: end }
}

/** States in which a segment was open: an isolation test from before says nothing about what was closed after. */
const OPEN_STATES: readonly SegmentState[] = ['not-assembled', 'vented', 'maintenance']

/** When the segment was last opened: the end of its last open state, or now while it is open; null when never. */
export function lastOpened(
  states: readonly { state: SegmentState; since: Date; endedAt: Date | null }[],
  now: Date,
): Date | null {
  const ends = states
    .filter(({ state, since }) => OPEN_STATES.includes(state) && since <= now)
    .map(({ endedAt }) => endedAt ?? now)
  return ends.length === 0 ? null : new Date(Math.max(...ends.map((at) => at.getTime())))
}
