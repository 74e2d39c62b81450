/**
 * What every gauge last said, and how each segment stands. One place, so that Line, Segment, reports and the API cannot
 * disagree.
 */
import type { DbOrTx } from '../db/client.server.ts'
import {
  binReadings,
  type ChannelReading,
  factorAt,
  lastReadings,
  listFittingSpans,
  listMapSpans,
  listPositions,
  listSourceEnds,
  type PositionRow,
  type SourceEnd,
} from '../db/queries/readings.server.ts'
import {
  type LimitRow,
  listLimits,
  listPlacedPumps,
  listSegments,
  type PlacedPump,
  type SegmentWithState,
} from '../db/queries/segments.server.ts'
import { isFresh } from '../domain/freshness.ts'
import type { Quality } from '../domain/readings.ts'
import type { LimitKind } from '../domain/register.ts'
import { type GaugeStanding, type SegmentStanding, standingOf } from '../domain/segment-standing.ts'
import { endToCrossRatio } from './segment-model.server.ts'

export const PRESSURE_KINDS = ['hot-cathode', 'cold-cathode', 'thermal-conductivity'] as const

/** The last word of a position, whatever it was, and its last usable value. */
export interface LastAtPosition {
  position: PositionRow
  channelId: number | null
  value: number | null
  at: Date | null
  fresh: boolean
  /** Quality of the newest reading of any kind: why there may be no value. */
  newestQuality: Quality | null
  newestAt: Date | null
  importId: number | null
  lineNo: number | null
  sourceCode: string | null
}

/** Last readings of positions at an instant, through the maps and factors in force. */
export async function lastAtPositions(
  db: DbOrTx,
  positions: readonly PositionRow[],
  now: Date,
  sources: readonly SourceEnd[],
): Promise<LastAtPosition[]> {
  const ids = positions.map(({ id }) => id)
  const justNow = new Date(now.getTime() + 1)
  const [spans, fittings] = await Promise.all([
    listMapSpans(db, ids, now, justNow),
    listFittingSpans(db, ids),
  ])
  const last = await lastReadings(db, [...new Set(spans.map(({ channelId }) => channelId))], now)
  const sourceById = new Map(sources.map((source) => [source.sourceId, source]))
  return positions.map((position) => {
    const own = spans.filter((span) => span.positionId === position.id)
    let best: { reading: ChannelReading; sourceId: number; channelId: number } | null = null
    let newest: ChannelReading | null = null
    for (const span of own) {
      const found = last.get(span.channelId)
      // A reading from before the map began belonged to another position.
      if (
        found?.usable &&
        found.usable.at >= span.from &&
        (best === null || found.usable.at > best.reading.at)
      ) {
        best = { reading: found.usable, sourceId: span.sourceId, channelId: span.channelId }
      }
      if (found?.any && found.any.at >= span.from && (newest === null || found.any.at > newest.at))
        newest = found.any
    }
    const source = best === null ? undefined : sourceById.get(best.sourceId)
    const value = best?.reading.value ?? null
    return {
      position,
      channelId: best?.channelId ?? own[0]?.channelId ?? null,
      value:
        best === null || value === null ? null : value * factorAt(fittings, position.id, best.reading.at),
      at: best?.reading.at ?? null,
      fresh: isFresh({
        lastGoodAt: best?.reading.at ?? null,
        sourceEndAt: source?.endAt ?? null,
        periodSeconds: source?.periodSeconds ?? 0,
        now,
      }),
      newestQuality: newest?.quality ?? null,
      newestAt: newest?.at ?? null,
      importId: best?.reading.importId ?? null,
      lineNo: best?.reading.lineNo ?? null,
      sourceCode: source?.code ?? null,
    }
  })
}

/** The limit of a kind for a segment: its own if it has one, else the site's. */
export function limitFor(
  limits: readonly LimitRow[],
  kind: LimitKind,
  segmentId: number | null,
): LimitRow | null {
  const ofKind = limits.filter((limit) => limit.kind === kind)
  return (
    ofKind.find((limit) => segmentId !== null && limit.segmentId === segmentId) ??
    ofKind.find((limit) => limit.segmentId === null) ??
    null
  )
}

export interface StandingSegment {
  segment: SegmentWithState
  gauges: (LastAtPosition & { standing: GaugeStanding })[]
  standing: SegmentStanding
  target: LimitRow | null
  limit: LimitRow | null
  pumps: PlacedPump[]
}

/** Every segment with its gauges and standing at an instant. */
export async function readStandings(db: DbOrTx, now: Date, segmentTag?: string): Promise<StandingSegment[]> {
  const [allSegments, limits, sources] = await Promise.all([
    listSegments(db, now),
    listLimits(db, now),
    listSourceEnds(db, now),
  ])
  const segments =
    segmentTag === undefined ? allSegments : allSegments.filter(({ tag }) => tag === segmentTag)
  const ids = new Set(segments.map(({ id }) => id))
  const positions = (await listPositions(db, { kinds: PRESSURE_KINDS })).filter(
    ({ segmentId }) => segmentId !== null && ids.has(segmentId),
  )
  const [last, pumps, dayMeans] = await Promise.all([
    lastAtPositions(db, positions, now, sources),
    listPlacedPumps(db, [...ids], now),
    readDayMeans(db, positions, sources, now),
  ])
  return segments.map((segment) => {
    const gauges = last
      .filter(({ position }) => position.segmentId === segment.id)
      .map((gauge) => ({ ...gauge, standing: toStanding(gauge, segment, dayMeans) }))
    const ownPumps = pumps.filter(({ segmentId }) => segmentId === segment.id)
    const target = limitFor(limits, 'target', segment.id)
    const limit = limitFor(limits, 'operating-limit', segment.id)
    return {
      segment,
      gauges,
      pumps: ownPumps,
      target,
      limit,
      standing: standingOf({
        state: segment.state,
        gauges: gauges.map(({ standing }) => standing),
        targetPa: target?.value ?? null,
        limitPa: limit?.value ?? null,
        expectedEndRatio: endToCrossRatio(segment, ownPumps),
      }),
    }
  })
}

function toStanding(
  gauge: LastAtPosition,
  segment: SegmentWithState,
  dayMeans: ReadonlyMap<number, number>,
): GaugeStanding {
  return {
    tag: gauge.position.tag,
    kind: gauge.position.kind as GaugeStanding['kind'],
    offsetM: (gauge.position.chainageM ?? segment.startM) - segment.startM,
    value: gauge.value,
    at: gauge.at,
    fresh: gauge.fresh,
    dayMean: dayMeans.get(gauge.position.id) ?? null,
  }
}

/** Geometric mean over the last day of each position's own data, by its source's newest file. */
async function readDayMeans(
  db: DbOrTx,
  positions: readonly PositionRow[],
  sources: readonly SourceEnd[],
  now: Date,
): Promise<Map<number, number>> {
  const newest = Math.max(0, ...sources.map(({ endAt }) => endAt?.getTime() ?? 0))
  const to = newest === 0 ? now : new Date(Math.min(now.getTime(), newest) + 1)
  const from = new Date(to.getTime() - 86_400_000)
  const ids = positions.map(({ id }) => id)
  const [spans, fittings] = await Promise.all([listMapSpans(db, ids, from, to), listFittingSpans(db, ids)])
  const bins = await binReadings(db, {
    channelIds: [...new Set(spans.map(({ channelId }) => channelId))],
    from,
    to,
    binSeconds: 86_401,
    logarithmic: true,
  })
  const byChannel = new Map(bins.map((bin) => [bin.channelId, bin.mean]))
  const means = new Map<number, number>()
  for (const span of spans) {
    const mean = byChannel.get(span.channelId)
    if (mean !== undefined) means.set(span.positionId, mean * factorAt(fittings, span.positionId, to))
  }
  return means
}
