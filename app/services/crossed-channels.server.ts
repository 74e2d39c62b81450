/**
 * Channels that seem to carry each other's gauge: hot cathodes of neighbouring segments, by their readings of the last
 * weeks, as the maps in force have them. What is found is shown, and nothing is changed: a person records the map.
 */
import type { Db } from '../db/client.server.ts'
import { listEntries } from '../db/queries/logbook.server.ts'
import {
  type Bin,
  binReadings,
  type FittingSpan,
  factorAt,
  listFittingSpans,
  listMapSpans,
  listPositions,
  type MapSpan,
  type PositionRow,
} from '../db/queries/readings.server.ts'
import { type ChannelFacts, listChannels } from '../db/queries/register-maps.server.ts'
import {
  listPlacedPumps,
  listSegments,
  listStates,
  type SegmentWithState,
} from '../db/queries/segments.server.ts'
import { beginInFineBins } from '../domain/crossed-begin.ts'
import { judgePair, type PairJudgement, type Suspicion } from '../domain/crossed-channels.ts'
import type { KnownEvent } from '../domain/crossed-events.ts'
import { fullCountsOf, type GaugeSeries, lnSeries, type PressureBin } from '../domain/crossed-series.ts'
import type { EntryKind } from '../domain/logbook.ts'
import { SEGMENT_STATES } from '../domain/segment-states.ts'

const HOUR_MS = 3_600_000
const BIN_MS = 2 * HOUR_MS
const FINE_MS = HOUR_MS / 6
/** Six weeks: the night's crossing is as plain as last month's, and a year would mix in what has changed for good. */
const WINDOW_DAYS = 42
/** Entries of these kinds say that something was done to the gas. */
const EVENT_KINDS: readonly EntryKind[] = ['valve', 'pump', 'vent', 'heat', 'test']
/** What was written down so near to the begin is shown beside it. */
const NEAR_MS = 6 * HOUR_MS
const ENTRIES_READ = 500
const QUOTED = 3

/** A channel as the maps have it today. */
export interface LabelledChannel {
  channelId: number
  channel: string
  position: string
  segment: string
}

export interface ComparedPair {
  x: LabelledChannel
  y: LabelledChannel
  sourceCode: string
  judgement: PairJudgement
  /** What the logbook has about these segments around the begin. */
  nearby: { at: Date; segment: string | null; text: string }[]
}

interface CrossedChannels {
  from: Date
  to: Date
  pairs: ComparedPair[]
}

/**
 * Compares the hot cathodes of neighbouring segments, in pairs that one source reads: cables are exchanged at a logger.
 *
 * @param only a segment's tag: its own pairs alone, which reads three segments and not the whole line
 */
export async function compareChannels(db: Db, now: Date, only?: string): Promise<CrossedChannels> {
  const fromMs = Math.floor(now.getTime() / BIN_MS) * BIN_MS - WINDOW_DAYS * 24 * HOUR_MS
  const length = Math.floor((now.getTime() - fromMs) / BIN_MS)
  const [from, to] = [new Date(fromMs), new Date(fromMs + length * BIN_MS)]
  const segments = near(await listSegments(db, now), only)
  const facts = await readFacts(db, segments, from, to)
  const gauges = await readGauges(db, facts, { fromMs, binMs: BIN_MS, length })
  const pairs: ComparedPair[] = []
  for (const [first, second] of neighbours(segments)) {
    if (only !== undefined && first.tag !== only && second.tag !== only) continue
    const events = facts.events.filter(({ segment }) => segment === first.tag || segment === second.tag)
    const judge = (x: Gauge, y: Gauge, grid: { fromMs: number; binMs: number }) =>
      judgePair({ x: tested(x, gauges), y: tested(y, gauges), ...grid, events })
    for (const x of gauges.filter(hotOf(first))) {
      for (const y of gauges.filter(hotOf(second))) {
        if (x.channel === null || y.channel === null || x.channel.sourceId !== y.channel.sourceId) continue
        const judgement = judge(x, y, { fromMs, binMs: BIN_MS })
        const closer =
          judgement.kind === 'suspected' ? await withCloserBegin(db, facts, x, y, judgement) : judgement
        pairs.push({
          x: labelled(x, x.channel),
          y: labelled(y, y.channel),
          sourceCode: x.channel.sourceCode,
          judgement: closer,
          nearby: closer.kind === 'suspected' ? nearby(facts, [first, second], closer) : [],
        })
      }
    }
  }
  return { from, to, pairs }
}

/** A gauge with its series, and the channel that the maps give it today. */
interface Gauge extends GaugeSeries {
  position: PositionRow
  segment: SegmentWithState
  channel: ChannelFacts | null
}

interface Facts {
  positions: readonly PositionRow[]
  segments: readonly SegmentWithState[]
  channels: readonly ChannelFacts[]
  spans: readonly MapSpan[]
  fittings: readonly FittingSpan[]
  events: readonly KnownEvent[]
  entries: Awaited<ReturnType<typeof listEntries>>
}

function near(segments: readonly SegmentWithState[], only: string | undefined): SegmentWithState[] {
  if (only === undefined) return [...segments]
  const index = segments.findIndex(({ tag }) => tag === only)
  return index < 0 ? [] : segments.slice(Math.max(0, index - 1), index + 2)
}

/** Pairs of segments of one line that follow each other. */
function neighbours(segments: readonly SegmentWithState[]): [SegmentWithState, SegmentWithState][] {
  return segments.flatMap((first, index): [SegmentWithState, SegmentWithState][] => {
    const second = segments[index + 1]
    return second === undefined || second.lineId !== first.lineId ? [] : [[first, second]]
  })
}

async function readFacts(
  db: Db,
  segments: readonly SegmentWithState[],
  from: Date,
  to: Date,
): Promise<Facts> {
  const ids = segments.map(({ id }) => id)
  const positions = (await listPositions(db, { kinds: ['hot-cathode', 'cold-cathode'] })).filter(
    ({ segmentId }) => segmentId !== null && ids.includes(segmentId),
  )
  const positionIds = positions.map(({ id }) => id)
  const [channels, spans, fittings, pumps, states, entries] = await Promise.all([
    listChannels(db),
    listMapSpans(db, positionIds, from, to),
    listFittingSpans(db, positionIds),
    listPlacedPumps(db, ids),
    Promise.all(segments.map(async (segment) => ({ segment, spans: await listStates(db, segment.id) }))),
    listEntries(db, { from, to, limit: ENTRIES_READ }),
  ])
  const tagOf = new Map(segments.map(({ id, tag }) => [id, tag]))
  const within = ({ atMs }: KnownEvent) => atMs >= from.getTime() && atMs < to.getTime()
  const events: KnownEvent[] = [
    ...states.flatMap(({ segment, spans: own }) =>
      own.map(({ since, state }) => ({
        atMs: since.getTime(),
        segment: segment.tag,
        kind: 'state' as const,
        text: `${segment.tag} was set to ${SEGMENT_STATES[state].label}`,
      })),
    ),
    ...pumps.flatMap(({ segmentId, startsAt, endsAt, tag }) =>
      [
        { at: startsAt, text: `${tag} began to pump on ${tagOf.get(segmentId)}` },
        { at: endsAt, text: `${tag} was taken off ${tagOf.get(segmentId)}` },
      ].flatMap(({ at, text }) =>
        at === null
          ? []
          : [{ atMs: at.getTime(), segment: tagOf.get(segmentId) ?? '', kind: 'pump' as const, text }],
      ),
    ),
    ...entries.flatMap(({ kind, segmentTag, eventAt, text }) =>
      segmentTag !== null && EVENT_KINDS.includes(kind)
        ? [{ atMs: eventAt.getTime(), segment: segmentTag, kind: 'log' as const, text: `“${text}”` }]
        : [],
    ),
    ...fittings.flatMap(({ positionId, from: at }) => {
      const position = positions.find(({ id }) => id === positionId)
      return position?.kind !== 'hot-cathode' || position.segmentId === null
        ? []
        : [
            {
              atMs: at.getTime(),
              segment: tagOf.get(position.segmentId) ?? '',
              kind: 'gauge-exchange' as const,
              text: `The instrument at ${position.tag} was exchanged`,
            },
          ]
    }),
  ].filter(within)
  return { positions, segments, channels, spans, fittings, events, entries }
}

interface Grid {
  fromMs: number
  binMs: number
  length: number
}

async function readGauges(
  db: Db,
  facts: Facts,
  grid: Grid,
  positionIds?: readonly number[],
): Promise<Gauge[]> {
  const positions = facts.positions.filter(({ id }) => positionIds === undefined || positionIds.includes(id))
  const spans = facts.spans.filter(({ positionId }) => positions.some(({ id }) => id === positionId))
  const bins = await binReadings(db, {
    channelIds: [...new Set(spans.map(({ channelId }) => channelId))],
    from: new Date(grid.fromMs),
    to: new Date(grid.fromMs + grid.length * grid.binMs),
    binSeconds: grid.binMs / 1000,
    logarithmic: true,
  })
  const full = fullBySource(facts, bins, grid)
  return positions.flatMap((position) => {
    const segment = facts.segments.find(({ id }) => id === position.segmentId)
    if (segment === undefined) return []
    const own = spans.filter(({ positionId }) => positionId === position.id)
    const current = own.find(({ to }) => to === null) ?? own.at(-1)
    const seen = own.flatMap((span) => through(span, bins, facts.fittings))
    return [
      {
        tag: position.tag,
        ln: lnSeries(seen, grid, full.get(current?.sourceId ?? 0) ?? []),
        position,
        segment,
        channel: facts.channels.find(({ id }) => id === current?.channelId) ?? null,
      },
    ]
  })
}

/** Bins of a channel in the time that it belonged to a position, with the factor of the instrument there. */
function through(span: MapSpan, bins: readonly Bin[], fittings: readonly FittingSpan[]): PressureBin[] {
  return bins
    .filter(
      ({ channelId, atMs }) =>
        channelId === span.channelId &&
        atMs >= span.from.getTime() &&
        (span.to === null || atMs < span.to.getTime()),
    )
    .map(({ atMs, mean, count }) => ({
      atMs,
      mean: mean * factorAt(fittings, span.positionId, new Date(atMs)),
      count,
    }))
}

function fullBySource({ channels }: Facts, bins: readonly Bin[], grid: Grid): Map<number, number[]> {
  const sourceOf = new Map(channels.map(({ id, sourceId }) => [id, sourceId]))
  const sources = [...new Set(bins.map(({ channelId }) => sourceOf.get(channelId) ?? 0))]
  return new Map(
    sources.map((source) => [
      source,
      fullCountsOf(
        bins.filter(({ channelId }) => sourceOf.get(channelId) === source),
        grid,
      ),
    ]),
  )
}

function hotOf(segment: SegmentWithState): (gauge: Gauge) => boolean {
  return (gauge) => gauge.segment.id === segment.id && gauge.position.kind === 'hot-cathode'
}

function tested(gauge: Gauge, all: readonly Gauge[]) {
  return {
    tag: gauge.tag,
    ln: gauge.ln,
    segment: gauge.segment.tag,
    others: all.filter((other) => other.segment.id === gauge.segment.id && other !== gauge),
  }
}

function labelled({ tag, segment }: Gauge, channel: ChannelFacts): LabelledChannel {
  return { channelId: channel.id, channel: channel.name, position: tag, segment: segment.tag }
}

/** The begin to ten minutes instead of two hours, from the readings around it. */
async function withCloserBegin(
  db: Db,
  facts: Facts,
  x: Gauge,
  y: Gauge,
  suspicion: Suspicion,
): Promise<Suspicion> {
  const { begin, by } = suspicion
  if (by !== 'levels' || begin.afterMs === null) return suspicion
  const grid = {
    fromMs: begin.afterMs - 6 * BIN_MS,
    binMs: FINE_MS,
    length: Math.ceil((begin.byMs - begin.afterMs + 12 * BIN_MS) / FINE_MS),
  }
  const own = [x.segment.id, y.segment.id]
  const ids = facts.positions.filter(({ segmentId }) => own.includes(segmentId ?? 0)).map(({ id }) => id)
  const fine = await readGauges(db, facts, grid, ids)
  const finely = (gauge: Gauge) => fine.find(({ position }) => position.id === gauge.position.id)
  const [fineX, fineY] = [finely(x), finely(y)]
  if (fineX === undefined || fineY === undefined) return suspicion
  const closer = beginInFineBins({ x: tested(fineX, fine), y: tested(fineY, fine), ...grid, events: [] })
  return { ...suspicion, begin: closer ?? begin }
}

function nearby(
  { entries }: Facts,
  segments: readonly SegmentWithState[],
  { begin }: Suspicion,
): ComparedPair['nearby'] {
  const fromMs = (begin.afterMs ?? begin.byMs) - NEAR_MS
  return entries
    .filter(({ eventAt }) => eventAt.getTime() >= fromMs && eventAt.getTime() <= begin.byMs + NEAR_MS)
    .map(({ eventAt, segmentTag, text, amendments }) => ({
      at: eventAt,
      segment: segmentTag,
      text: amendments.at(-1)?.text ?? text,
    }))
    .filter(({ segment, text }) => segments.some(({ tag }) => segment === tag || text.includes(tag)))
    .sort((a, b) => Math.abs(a.at.getTime() - begin.byMs) - Math.abs(b.at.getTime() - begin.byMs))
    .slice(0, QUOTED)
}
