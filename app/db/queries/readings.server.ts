/**
 * Readings as positions see them: through the channel maps and fittings in force at the reading's own instant. Stored
 * readings stay by raw channel; a corrected map changes what these queries return and nothing else.
 */
import { and, asc, eq, gt, inArray, isNull, lt, or, type SQL, sql } from 'drizzle-orm'
import {
  type Quality,
  type Quantity,
  qualityCode,
  qualityWord,
  UNTIMED_MARKS,
  USABLE_QUALITIES,
} from '../../domain/readings.ts'
import type { PositionKind } from '../../domain/register.ts'
import type { DbOrTx } from '../client.server.ts'
import { channel, channelMap, fitting, importFile, position, reading, source } from '../schema/index.ts'

const USABLE_CODES = USABLE_QUALITIES.map(qualityCode)
/** SQL for "may be used as a measured value". */
const usable: SQL = sql`${reading.quality} IN (${sql.join(
  USABLE_CODES.map((code) => sql`${code}`),
  sql`, `,
)})
  AND (${reading.marks} & ${UNTIMED_MARKS}) = 0 AND ${reading.value} IS NOT NULL`

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
  const last = async (channelId: number, extra: SQL | undefined): Promise<ChannelReading | null> => {
    const rows = await db
      .select(readingColumns)
      .from(reading)
      .where(and(eq(reading.channelId, channelId), gt(reading.at, since), sql`${reading.at} <= ${at}`, extra))
      .orderBy(sql`${reading.at} DESC`)
      .limit(1)
    const row = rows[0]
    return row === undefined ? null : { ...row, quality: qualityWord(row.quality) }
  }
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

/**
 * Usable readings of channels in equal bins over [from, to): minimum, maximum, mean and count. Bins without usable
 * readings are absent: a gap stays a gap.
 */
export async function binReadings(
  db: DbOrTx,
  input: { channelIds: readonly number[]; from: Date; to: Date; binSeconds: number; logarithmic: boolean },
): Promise<Bin[]> {
  if (input.channelIds.length === 0) return []
  const binNo = sql<number>`FLOOR(TIMESTAMPDIFF(SECOND, ${input.from}, ${reading.at}) / ${input.binSeconds})`
  const mean = input.logarithmic
    ? sql<number>`EXP(AVG(LN(${reading.value})))`
    : sql<number>`AVG(${reading.value})`
  const positive = input.logarithmic ? sql`${reading.value} > 0` : undefined
  const rows = await db
    .select({
      channelId: reading.channelId,
      bin: binNo.mapWith(Number).as('bin_no'),
      min: sql`MIN(${reading.value})`.mapWith(Number),
      max: sql`MAX(${reading.value})`.mapWith(Number),
      mean: mean.mapWith(Number),
      count: sql`COUNT(*)`.mapWith(Number),
    })
    .from(reading)
    .where(
      and(
        inArray(reading.channelId, [...input.channelIds]),
        sql`${reading.at} >= ${input.from}`,
        lt(reading.at, input.to),
        usable,
        positive,
      ),
    )
    .groupBy(reading.channelId, sql`bin_no`)
    .orderBy(reading.channelId, sql`bin_no`)
  return rows.map(({ bin, ...row }) => ({
    ...row,
    atMs: input.from.getTime() + bin * input.binSeconds * 1000,
  }))
}

/** Readings of one channel as stored, oldest first, for lists and downloads. */
export async function listChannelReadings(
  db: DbOrTx,
  input: { channelId: number; from: Date; to: Date; limit: number },
): Promise<ChannelReading[]> {
  const rows = await db
    .select(readingColumns)
    .from(reading)
    .where(
      and(
        eq(reading.channelId, input.channelId),
        sql`${reading.at} >= ${input.from}`,
        lt(reading.at, input.to),
      ),
    )
    .orderBy(asc(reading.at), asc(reading.seq))
    .limit(input.limit)
  return rows.map((row) => ({ ...row, quality: qualityWord(row.quality) }))
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
