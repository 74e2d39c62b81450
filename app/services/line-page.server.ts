/** Line: the whole facility at one instant. */
import type { Db } from '../db/client.server.ts'
import { binReadings, listMapSpans, listSourceEnds } from '../db/queries/readings.server.ts'
import { listLimits, listLines } from '../db/queries/segments.server.ts'
import { expectedNight, type NightFileStatus } from '../domain/expected-files.ts'
import type { PermitState } from '../domain/permit-words.ts'
import type { Quality } from '../domain/readings.ts'
import type { PumpKind } from '../domain/register.ts'
import {
  type FacilityFigures,
  facilityFigures,
  type Question,
  type SegmentStanding,
} from '../domain/segment-standing.ts'
import type { SegmentState } from '../domain/segment-states.ts'
import { weeklyChange } from '../domain/trend.ts'
import { permitsAtTheSite } from './permit-register.server.ts'
import { predictedProfile } from './segment-model.server.ts'
import { getSite } from './site.server.ts'
import { type LastAtPosition, limitFor, readStandings, type StandingSegment } from './standing.server.ts'

export interface LineGauge {
  tag: string
  kind: string
  chainageM: number
  value: number | null
  at: Date | null
  fresh: boolean
  newestQuality: Quality | null
  newestAt: Date | null
}

export interface LineSegment {
  tag: string
  lineCode: string
  startM: number
  endM: number
  state: SegmentState
  since: Date | null
  stateReason: string
  verdict: SegmentStanding['verdict']
  freshGauges: { fresh: number; of: number }
  headline: { tag: string; value: number | null; at: Date | null; fresh: boolean } | null
  targetPa: number | null
  limitPa: number | null
  questions: Question[]
  gauges: LineGauge[]
  /** Pumps at work on the segment, in order along it. */
  pumps: { tag: string; kind: PumpKind; chainageM: number }[]
  /** Pressure the model expects along the segment now (nitrogen-equivalent), by metres from the segment's start; null without a model for this state. */
  predicted: { offsetM: number; pa: number }[] | null
  /** Permits at the site there; null on a look back, which knows of no permits. */
  permits: { number: string; state: PermitState }[] | null
}

export interface LinePageData {
  lines: { code: string; name: string; lengthM: number; joinsAtM: number | null }[]
  segments: LineSegment[]
  figures: FacilityFigures
  worst: { tag: string; ratio: number; pa: number } | null
  nightFiles: NightFileStatus[]
  /** Sources that owe night files and have never sent one, which is not the same as being late. */
  silentSources: string[]
  at: Date
  zone: string
}

/**
 * Everything Line shows, at an instant (now, or an earlier one to look back).
 *
 * @param lookBack whether the instant is an earlier one: permits are shown as they stand now or not at all
 */
export async function readLinePage(db: Db, at: Date, lookBack = false): Promise<LinePageData> {
  const [site, lines, standings, limits, sources, permits] = await Promise.all([
    getSite(db),
    listLines(db),
    readStandings(db, at),
    listLimits(db, at),
    listSourceEnds(db, at),
    lookBack ? null : permitsAtTheSite(db, at),
  ])
  const mainCodes = new Set(lines.filter(({ joinsLineId }) => joinsLineId === null).map(({ code }) => code))
  const owing = sources.filter(({ dueAt }) => dueAt !== '')
  const needed = limitFor(limits, 'available-at-target', null)?.value ?? standings.length
  return {
    lines: lines.map(({ code, name, lengthM, joinsAtM }) => ({ code, name, lengthM, joinsAtM })),
    segments: standings.map((entry) => ({
      ...toLineSegment(entry, at),
      permits: permits === null ? null : (permits.get(entry.segment.tag) ?? []),
    })),
    figures: facilityFigures(
      standings.map(({ segment, standing }) => ({
        tag: segment.tag,
        main: mainCodes.has(segment.lineCode),
        state: segment.state,
        standing,
      })),
      needed,
    ),
    worst: worstInService(standings),
    nightFiles: owing
      .filter(({ endAt }) => endAt !== null)
      .map((source) =>
        expectedNight({
          code: source.code,
          dueAt: source.dueAt,
          endAt: source.endAt,
          now: at,
          zone: site.timeZone,
        }),
      ),
    silentSources: owing.filter(({ endAt }) => endAt === null).map(({ code }) => code),
    at,
    zone: site.timeZone,
  }
}

function toLineSegment(entry: StandingSegment, at: Date): Omit<LineSegment, 'permits'> {
  const { segment, standing, gauges, pumps, target, limit } = entry
  return {
    tag: segment.tag,
    lineCode: segment.lineCode,
    startM: segment.startM,
    endM: segment.endM,
    state: segment.state,
    since: segment.since,
    stateReason: segment.stateReason,
    verdict: standing.verdict,
    freshGauges: standing.freshGauges,
    headline:
      standing.headline === null
        ? null
        : {
            tag: standing.headline.tag,
            value: standing.headline.value,
            at: standing.headline.at,
            fresh: standing.headline.fresh,
          },
    targetPa: target?.value ?? null,
    limitPa: limit?.value ?? null,
    questions: standing.questions,
    gauges: gauges.map(toLineGauge),
    pumps: pumps
      .map(({ tag, kind, offsetM }) => ({ tag, kind, chainageM: segment.startM + offsetM }))
      .sort((a, b) => a.chainageM - b.chainageM),
    predicted: predictedProfile(entry, at),
  }
}

function toLineGauge(gauge: LastAtPosition): LineGauge {
  return {
    tag: gauge.position.tag,
    kind: gauge.position.kind,
    chainageM: gauge.position.chainageM ?? 0,
    value: gauge.value,
    at: gauge.at,
    fresh: gauge.fresh,
    newestQuality: gauge.newestQuality,
    newestAt: gauge.newestAt,
  }
}

/** The segment in service that stands highest against its target. */
function worstInService(standings: readonly StandingSegment[]): LinePageData['worst'] {
  let worst: LinePageData['worst'] = null
  for (const { segment, standing, target } of standings) {
    const headline = standing.headline
    if (segment.state !== 'in-service' || target === null || !headline?.fresh || headline.value === null)
      continue
    const ratio = headline.value / target.value
    if (worst === null || ratio > worst.ratio) worst = { tag: segment.tag, ratio, pa: headline.value }
  }
  return worst
}

export interface Trend {
  tag: string
  /** Geometric mean per bin; null where there is no usable reading. Oldest first. */
  values: (number | null)[]
  /** Relative change per week over the last four weeks (0.06 is +6 % a week); null without enough data. */
  perWeek: number | null
}

const TREND_DAYS = 30
const TREND_BIN_SECONDS = 43_200

/** Thirty days of each segment's cross gauge in half-day steps, for the small line and the trend. */
export async function readTrends(db: Db, at: Date): Promise<Trend[]> {
  const standings = await readStandings(db, at)
  const crosses = standings.flatMap(({ segment, gauges }) => {
    const cross = gauges.find(({ position }) => position.kind === 'hot-cathode' && position.tag.endsWith('B'))
    return cross === undefined ? [] : [{ tag: segment.tag, positionId: cross.position.id }]
  })
  const steps = (TREND_DAYS * 86_400) / TREND_BIN_SECONDS
  // Whole half days of UTC, which is what rollups are kept for; the last one is not over yet.
  const stepMs = TREND_BIN_SECONDS * 1000
  const from = new Date((Math.floor(at.getTime() / stepMs) + 1 - steps) * stepMs)
  const spans = await listMapSpans(
    db,
    crosses.map(({ positionId }) => positionId),
    from,
    at,
  )
  const bins = await binReadings(db, {
    channelIds: [...new Set(spans.map(({ channelId }) => channelId))],
    from,
    to: at,
    binSeconds: TREND_BIN_SECONDS,
    logarithmic: true,
  })
  return crosses.map(({ tag, positionId }) => {
    const values = new Array<number | null>(steps).fill(null)
    for (const span of spans.filter((candidate) => candidate.positionId === positionId)) {
      for (const bin of bins) {
        const inside = bin.atMs >= span.from.getTime() && (span.to === null || bin.atMs < span.to.getTime())
        const step = Math.floor((bin.atMs - from.getTime()) / (TREND_BIN_SECONDS * 1000))
        if (bin.channelId === span.channelId && inside && step >= 0 && step < steps) values[step] = bin.mean
      }
    }
    return { tag, values, perWeek: weeklyChange(values, TREND_BIN_SECONDS) }
  })
}
