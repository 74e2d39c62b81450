/**
 * Readings as positions see them: through the channel maps and fittings in force at the reading's instant, and at the
 * true instant where the clock of its source has been corrected. Stored readings stay by raw channel and as the file has
 * their time; a corrected map or clock changes what these queries return and nothing else.
 */
import { and, asc, desc, eq, gt, gte, inArray, isNull, lt, or, type SQL, sql } from 'drizzle-orm'
import { type ClockCorrection, ownStretches, withOffset } from '../../domain/clock-correction.ts'
import {
  type Quality,
  type Quantity,
  qualityWord,
  UNTIMED_MARKS,
  USABLE_QUALITIES,
} from '../../domain/readings.ts'
import type { PositionKind } from '../../domain/register.ts'
import { bucketStart, levelFor, wholeBuckets } from '../../domain/rollups.ts'
import type { DbOrTx } from '../client.server.ts'
import { channel, channelMap, fitting, importFile, position, reading, source } from '../schema/index.ts'
import { type Corrections, correctionsFor, readingParts } from './clock-corrections.server.ts'
import { listDue } from './rollups.server.ts'
import { usable } from './usable.server.ts'

export interface PositionRow {
  id: number
  tag: string
  kind: PositionKind
  quantity: Quantity
  segmentId: number | null
  chainageM: number | null
  label: string
}

/** Positions of the kinds asked for, in order along the tube. */
export async function listPositions(
  db: DbOrTx,
  filter: { segmentId?: number; kinds?: readonly PositionKind[] } = {},
): Promise<PositionRow[]> {
  return db
    .select({
      id: position.id,
      tag: position.tag,
      kind: position.kind,
      quantity: position.quantity,
      segmentId: position.segmentId,
      chainageM: position.chainageM,
      label: position.label,
    })
    .from(position)
    .where(
      and(
        filter.segmentId === undefined ? undefined : eq(position.segmentId, filter.segmentId),
        filter.kinds === undefined ? undefined : inArray(position.kind, [...filter.kinds]),
      ),
    )
    .orderBy(asc(position.chainageM), asc(position.tag))
}

/** A stretch of time in which a channel's readings belong to a position. */
export interface MapSpan {
  positionId: number
  channelId: number
  sourceId: number
  from: Date
  to: Date | null
}

/** Channel maps of positions that overlap a stretch of time; `to` null means open. */
export async function listMapSpans(
  db: DbOrTx,
  positionIds: readonly number[],
  from: Date,
  to: Date,
): Promise<MapSpan[]> {
  if (positionIds.length === 0) return []
  return db
    .select({
      positionId: channelMap.positionId,
      channelId: channelMap.channelId,
      sourceId: channel.sourceId,
      from: channelMap.startsAt,
      to: channelMap.endsAt,
    })
    .from(channelMap)
    .innerJoin(channel, eq(channel.id, channelMap.channelId))
    .where(
      and(
        inArray(channelMap.positionId, [...positionIds]),
        isNull(channelMap.replacedAt),
        lt(channelMap.startsAt, to),
        or(isNull(channelMap.endsAt), gt(channelMap.endsAt, from)),
      ),
    )
}

export interface FittingSpan {
  positionId: number
  instrumentId: number
  factor: number
  from: Date
  to: Date | null
}

/** Instruments at positions and their factors, over all time. */
export async function listFittingSpans(db: DbOrTx, positionIds: readonly number[]): Promise<FittingSpan[]> {
  if (positionIds.length === 0) return []
  return db
    .select({
      positionId: fitting.positionId,
      instrumentId: fitting.instrumentId,
      factor: fitting.factor,
      from: fitting.startsAt,
      to: fitting.endsAt,
    })
    .from(fitting)
    .where(and(inArray(fitting.positionId, [...positionIds]), isNull(fitting.replacedAt)))
    .orderBy(asc(fitting.startsAt))
}

/** Factor of the instrument at a position at an instant; 1 where none is recorded. */
export function factorAt(fittings: readonly FittingSpan[], positionId: number, at: Date): number {
  for (const span of fittings) {
    if (span.positionId === positionId && span.from <= at && (span.to === null || span.to > at))
      return span.factor
  }
  return 1
}

export interface ChannelReading {
  channelId: number
  at: Date
  value: number | null
  bound: number | null
  quality: Quality
  marks: number
  importId: number
  lineNo: number
}

const readingColumns = {
  channelId: reading.channelId,
  at: reading.at,
  value: reading.value,
  bound: reading.bound,
  quality: reading.quality,
  marks: reading.marks,
  importId: reading.importId,
  lineNo: reading.lineNo,
}

/** How far back a "last reading" is looked for. Beyond that the channel has simply no last reading to show. */
const LOOK_BACK_DAYS = 45

/** Last reading of each channel at or before an instant: the last usable one, and the last of any quality. */
export async function lastReadings(
  db: DbOrTx,
  channelIds: readonly number[],
  at: Date,
): Promise<Map<number, { usable: ChannelReading | null; any: ChannelReading | null }>> {
  const since = new Date(at.getTime() - LOOK_BACK_DAYS * 86_400_000)
  const corrections = await correctionsFor(db, channelIds)
  const last = (channelId: number, extra: SQL | undefined): Promise<ChannelReading | null> =>
    edgeReading(db, { channelId, corrections: corrections.get(channelId) ?? [], since, at }, 'last', extra)
  const found = await Promise.all(
    channelIds.map(async (channelId) => {
      const any = await last(channelId, undefined)
      const usableAlready = any !== null && isUsableRow(any)
      return [
        channelId,
        { any, usable: usableAlready ? any : any === null ? null : await last(channelId, usable) },
      ] as const
    }),
  )
  return new Map(found)
}

/** A channel over (since, at] in true time. */
export interface EdgeWindow {
  channelId: number
  corrections: readonly ClockCorrection[]
  since: Date
  at: Date
}

/** First or last reading of a channel after one instant and not after another, of those that meet a condition. */
export async function edgeReading(
  db: DbOrTx,
  { channelId, corrections, since, at }: EdgeWindow,
  edge: 'first' | 'last',
  extra: SQL | undefined,
): Promise<ChannelReading | null> {
  const sign = edge === 'first' ? 1 : -1
  const stretches = ownStretches(corrections, since.getTime() + 1, at.getTime() + 1)
  const ends = await Promise.all(
    stretches.map(async (stretch) => {
      const rows = await db
        .select(readingColumns)
        .from(reading)
        .where(and(withinOwn(channelId, stretch), extra))
        .orderBy(edge === 'first' ? asc(reading.at) : desc(reading.at))
        .limit(1)
      return rows.map((row) => asRead(row, stretch.correction))
    }),
  )
  return ends.flat().sort((a, b) => sign * (a.at.getTime() - b.at.getTime()))[0] ?? null
}

function withinOwn(channelId: number, { fromMs, toMs }: { fromMs: number; toMs: number }): SQL | undefined {
  return and(
    eq(reading.channelId, channelId),
    gte(reading.at, new Date(fromMs)),
    lt(reading.at, new Date(toMs)),
  )
}

function asRead(
  row: Omit<ChannelReading, 'quality'> & { quality: number },
  correction: ClockCorrection | null,
): ChannelReading {
  return {
    ...row,
    at: new Date(withOffset(row.at.getTime(), correction)),
    quality: qualityWord(row.quality),
  }
}

function isUsableRow(row: ChannelReading): boolean {
  return USABLE_QUALITIES.includes(row.quality) && (row.marks & UNTIMED_MARKS) === 0 && row.value !== null
}

export interface Bin {
  channelId: number
  /** Start of the bin, milliseconds UTC. */
  atMs: number
  min: number
  max: number
  /** Geometric mean for positive values (pressures), arithmetic otherwise. */
  mean: number
  count: number
}

interface BinsAsked {
  channelIds: readonly number[]
  from: Date
  to: Date
  binSeconds: number
  /** Geometric means, of positive values only. */
  logarithmic: boolean
}

/** Stretches of changed readings beyond which it is simpler to read all from the readings. */
const MOST_DUE = 300

/**
 * Usable readings of channels in equal bins over [from, to): minimum, maximum, mean and count. Bins without usable
 * readings are absent: a gap stays a gap. Where bins are whole multiples of a rollup's length, counted from 1970 in
 * UTC, they are made of rollups, which is what makes long stretches fast; what has changed since they were made, and
 * the rest behind the last whole one, is read from the readings.
 */
export async function binReadings(db: DbOrTx, input: BinsAsked): Promise<Bin[]> {
  if (input.channelIds.length === 0) return []
  const { binSeconds, from, to } = input
  const level = levelFor(from.getTime(), binSeconds)
  const corrections = await correctionsFor(db, input.channelIds)
  const parts = level === null ? null : await rollupParts(db, input, level, corrections)
  const total = input.logarithmic ? sql`LN(value)` : sql`value`
  const positive = input.logarithmic ? sql` AND value > 0` : sql``
  const direct = (parts?.direct ?? [{ channelIds: input.channelIds, from, to }]).flatMap((stretch) =>
    readingParts(corrections, stretch.channelIds, stretch.from, stretch.to).map(
      ({
        where,
        at,
      }) => sql`SELECT channel_id, ${at} AS at, value AS low, value AS high, ${total} AS total, 1 AS n
        FROM reading WHERE ${usable}${positive} AND ${where}`,
    ),
  )
  const source = sql.join(parts === null ? direct : [parts.rolled, ...direct], sql` UNION ALL `)
  const [found] =
    await db.execute(sql`SELECT channel_id, TIMESTAMPDIFF(SECOND, ${from}, at) DIV ${binSeconds} AS bin,
      MIN(low) AS low, MAX(high) AS high, SUM(total) AS total, SUM(n) AS n
    FROM (${source}) AS pieces GROUP BY channel_id, bin ORDER BY channel_id, bin`)
  return (
    found as unknown as Record<'channel_id' | 'bin' | 'low' | 'high' | 'total' | 'n', string | number>[]
  ).map((row) => {
    const mean = Number(row.total) / Number(row.n)
    return {
      channelId: row.channel_id as number,
      atMs: from.getTime() + Number(row.bin) * binSeconds * 1000,
      min: row.low as number,
      max: row.high as number,
      mean: input.logarithmic ? Math.exp(mean) : mean,
      count: Number(row.n),
    }
  })
}

interface DirectStretch {
  channelIds: readonly number[]
  from: Date
  to: Date
}

/** What is read from rollups and what from readings; null when too much has changed for that to be worth while. */
async function rollupParts(
  db: DbOrTx,
  { channelIds, from, to, logarithmic }: BinsAsked,
  level: number,
  corrections: Corrections,
): Promise<{ rolled: SQL; direct: DirectStretch[] } | null> {
  const end = new Date(Math.max(from.getTime(), bucketStart(to.getTime(), level)))
  // First what is due, then the rollups: one that is made anew in between is left out, and none is taken that is old.
  const due = await listDue(db, channelIds, from, end, corrections)
  const changed = channelIds.flatMap((channelId) => {
    const own = due.filter((one) => one.channelId === channelId)
    return wholeBuckets(
      own.map((one) => ({ fromMs: one.from.getTime(), lastMs: one.last.getTime() })),
      level,
    ).map((span) => ({
      channelIds: [channelId],
      from: new Date(Math.max(span.fromMs, from.getTime())),
      to: new Date(Math.min(span.toMs, end.getTime())),
    }))
  })
  if (changed.length > MOST_DUE) return null
  const figures = logarithmic
    ? sql`min_positive AS low, max_value AS high, sum_ln AS total, positive AS n`
    : sql`min_value AS low, max_value AS high, sum_value AS total, usable AS n`
  const some = logarithmic ? sql`positive > 0` : sql`usable > 0`
  const without = changed.map(
    (span) => sql`(channel_id = ${span.channelIds[0]} AND at >= ${span.from} AND at < ${span.to})`,
  )
  return {
    rolled: sql`SELECT channel_id, at, ${figures} FROM rollup WHERE channel_id IN ${channelIds} AND level_seconds = ${level}
      AND at >= ${from} AND at < ${end} AND ${some}${changed.length === 0 ? sql`` : sql` AND NOT (${sql.join(without, sql` OR `)})`}`,
    direct: [{ channelIds, from: end, to }, ...changed],
  }
}

interface ReadingsAsked {
  channelId: number
  from: Date
  to: Date
  limit: number
}

/** Readings of one channel by the time as stored, oldest first: for comparing them with what a file says. */
export async function listStoredReadings(
  db: DbOrTx,
  { channelId, from, to, limit }: ReadingsAsked,
  correction: ClockCorrection | null = null,
): Promise<ChannelReading[]> {
  const rows = await db
    .select(readingColumns)
    .from(reading)
    .where(withinOwn(channelId, { fromMs: from.getTime(), toMs: to.getTime() }))
    .orderBy(asc(reading.at), asc(reading.seq))
    .limit(limit)
  return rows.map((row) => asRead(row, correction))
}

/** Readings of one channel by their true time, oldest first, for lists and downloads. */
export async function listChannelReadings(db: DbOrTx, asked: ReadingsAsked): Promise<ChannelReading[]> {
  const corrections = (await correctionsFor(db, [asked.channelId])).get(asked.channelId) ?? []
  const stretches = ownStretches(corrections, asked.from.getTime(), asked.to.getTime())
  const read: ChannelReading[] = []
  for (const { fromMs, toMs, correction } of stretches) {
    const own = { ...asked, from: new Date(fromMs), to: new Date(toMs) }
    read.push(...(await listStoredReadings(db, own, correction)))
  }
  if (stretches.length > 1) read.sort((a, b) => a.at.getTime() - b.at.getTime())
  return read.slice(0, asked.limit)
}

export interface SourceEnd {
  sourceId: number
  code: string
  periodSeconds: number
  dueAt: string
  /** Last instant of the newest accepted file; null when none has been accepted. */
  endAt: Date | null
}

/** Each source with the end of its newest accepted file at or before an instant. */
export async function listSourceEnds(db: DbOrTx, at: Date): Promise<SourceEnd[]> {
  return db
    .select({
      sourceId: source.id,
      code: source.code,
      periodSeconds: source.periodSeconds,
      dueAt: source.dueAt,
      endAt: sql`MAX(${importFile.lastAt})`.mapWith(importFile.lastAt),
    })
    .from(source)
    .leftJoin(
      importFile,
      and(
        eq(importFile.sourceId, source.id),
        eq(importFile.state, 'accepted'),
        sql`${importFile.lastAt} <= ${at}`,
      ),
    )
    .groupBy(source.id)
    .orderBy(asc(source.code))
}
