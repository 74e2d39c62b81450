/**
 * How a segment stands against its target and limit, from its gauges. Pure; used by Line, Segment and reports.
 *
 * Unknown is an answer of its own: a segment without fresh readings is neither good nor bad.
 */
import { SEGMENT_STATES, type SegmentState } from './segment-states.ts'

export interface GaugeStanding {
  tag: string
  kind: 'hot-cathode' | 'cold-cathode' | 'thermal-conductivity'
  /** Metres from the segment's start. */
  offsetM: number
  /** Last usable value in Pa, nitrogen-equivalent, and when; null when there is none. */
  value: number | null
  at: Date | null
  fresh: boolean
  /** Mean of log p over the last day, back as Pa; null without enough data. For comparing gauges, which one value is too noisy for. */
  dayMean: number | null
}

export type Verdict = 'at-target' | 'above-target' | 'over-limit' | 'unknown' | 'not-in-service'

export interface Question {
  tag: string
  text: string
}

export interface SegmentStanding {
  verdict: Verdict
  /** The gauge whose value stands for the segment: the cross if it is fresh, else an end. */
  headline: GaugeStanding | null
  /** Hot-cathode gauges with fresh data, of how many. */
  freshGauges: { fresh: number; of: number }
  questions: Question[]
}

/**
 * Standing of a segment in service: both hot-cathode gauges must be fresh and at or below the target. In every other
 * state the target does not apply ("not-in-service"), but the readings are still judged fresh or not.
 *
 * @param expectedEndRatio pressure at the ends over pressure at the cross that the pumping geometry gives, or null when
 *   the pump is not at the cross or the segment is isolated
 */
export function standingOf(input: {
  state: SegmentState
  gauges: readonly GaugeStanding[]
  targetPa: number | null
  limitPa: number | null
  expectedEndRatio: number | null
}): SegmentStanding {
  const { state, gauges, targetPa, limitPa } = input
  const hot = gauges.filter((gauge) => gauge.kind === 'hot-cathode')
  const fresh = hot.filter((gauge) => gauge.fresh)
  const standing = {
    headline: headlineOf(gauges),
    freshGauges: { fresh: fresh.length, of: hot.length },
    questions: state === 'in-service' ? questionsOf(hot, gauges, input.expectedEndRatio) : [],
  }
  if (state !== 'in-service') return { verdict: 'not-in-service', ...standing }
  if (fresh.length === 0) return { verdict: 'unknown', ...standing }
  const worst = Math.max(...fresh.map((gauge) => gauge.value ?? Number.NaN))
  if (limitPa !== null && worst > limitPa) return { verdict: 'over-limit', ...standing }
  if (targetPa !== null && worst > targetPa) return { verdict: 'above-target', ...standing }
  // One gauge below target and the other silent is not "both gauges below target".
  if (fresh.length < hot.length || targetPa === null) return { verdict: 'unknown', ...standing }
  return { verdict: 'at-target', ...standing }
}

/** The cross where a high-vacuum gauge there is fresh, then any fresh gauge of the kind that can read, then the newest old one. */
function headlineOf(gauges: readonly GaugeStanding[]): GaugeStanding | null {
  const rank = (gauge: GaugeStanding) =>
    (gauge.fresh ? 0 : 10) +
    (gauge.kind === 'hot-cathode' ? (gauge.tag.endsWith('B') ? 0 : 1) : gauge.kind === 'cold-cathode' ? 2 : 3)
  const known = gauges.filter((gauge) => gauge.value !== null)
  return [...known].sort((a, b) => rank(a) - rank(b))[0] ?? null
}

/** Largest ratio between a segment's high-vacuum gauges that is still believed, after the expected profile. */
const DISAGREEMENT = 3
/** Of the expected end-over-cross excess, the least that a believable pair must show. */
const LEAST_SHARE_OF_EXCESS = 0.25

/**
 * Readings that cannot all be true. Gas flows toward the pump, so with the pump at the cross an end cannot read below
 * the cross: a pair that does is crossed or wrong. And two gauges of a segment that differ by more than three times the
 * profile are not both right; the text names the low one too, since a low reading is a gauge fault more often than good
 * vacuum.
 */
function questionsOf(
  hot: readonly GaugeStanding[],
  all: readonly GaugeStanding[],
  expectedEndRatio: number | null,
): Question[] {
  if (expectedEndRatio === null) return []
  const end = hot.find((gauge) => gauge.tag.endsWith('A') && gauge.fresh)
  const cross = hot.find((gauge) => gauge.tag.endsWith('B') && gauge.fresh)
  if (end?.dayMean == null || cross?.dayMean == null) return []
  const cold = all.find((gauge) => gauge.kind === 'cold-cathode' && gauge.fresh)
  const lows: Question[] = []
  if (cold?.dayMean != null && cold.dayMean / end.dayMean > DISAGREEMENT) {
    lows.push({
      tag: end.tag,
      text: `${end.tag} reads ${ratioText(cold.dayMean / end.dayMean)} times below ${cold.tag}: more likely a gauge fault than better vacuum`,
    })
    return lows
  }
  const ratio = end.dayMean / cross.dayMean
  if (ratio < 1 + LEAST_SHARE_OF_EXCESS * (expectedEndRatio - 1)) {
    return [
      {
        tag: end.tag,
        text: `${end.tag} reads ${ratioText(ratio)} of ${cross.tag}; an end should read about ${ratioText(expectedEndRatio)} times the cross. Crossed channels or a drifting gauge`,
      },
    ]
  }
  return lows
}

function ratioText(ratio: number): string {
  return ratio.toFixed(ratio >= 10 ? 0 : 2).replace(/(\.\d)0$/, '$1')
}

/** Figures of the facility for the morning (scenario of the manager's first look). */
export interface FacilityFigures {
  inService: string[]
  atTarget: string[]
  aboveTarget: string[]
  overLimit: string[]
  unknown: string[]
  questioned: string[]
  heated: string[]
  available: boolean
  /** Why it is not available, in words; empty when it is. */
  unavailableBecause: string
}

/** Facility "available": every main-line segment in service and at or below its limit, at least `neededAtTarget` at target. */
export function facilityFigures(
  segments: readonly { tag: string; main: boolean; state: SegmentState; standing: SegmentStanding }[],
  neededAtTarget: number,
): FacilityFigures {
  const tags = (test: (segment: (typeof segments)[number]) => boolean) =>
    segments.filter(test).map(({ tag }) => tag)
  const main = segments.filter((segment) => segment.main)
  const belowLimit = main.filter(({ standing }) => ['at-target', 'above-target'].includes(standing.verdict))
  const atTarget = tags(({ standing }) => standing.verdict === 'at-target')
  const mainAtTarget = main.filter(({ standing }) => standing.verdict === 'at-target').length
  const available = main.length > 0 && belowLimit.length === main.length && mainAtTarget >= neededAtTarget
  return {
    inService: tags(({ state }) => state === 'in-service'),
    atTarget,
    aboveTarget: tags(({ standing }) => standing.verdict === 'above-target'),
    overLimit: tags(({ standing }) => standing.verdict === 'over-limit'),
    unknown: tags(({ standing }) => standing.verdict === 'unknown'),
    questioned: tags(({ standing }) => standing.questions.length > 0),
    heated: tags(({ state }) => SEGMENT_STATES[state].hot),
    available,
    unavailableBecause: available
      ? ''
      : `${belowLimit.length} of ${main.length} known to be within the limit, ${mainAtTarget} of ${neededAtTarget} needed at target`,
  }
}
