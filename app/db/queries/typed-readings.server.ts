/** Readings typed by people: where one may be typed, the channel that holds it, and those typed already. */
import { and, asc, between, desc, eq, gt, inArray, isNull, lte, or, sql } from 'drizzle-orm'
import type { Quantity } from '../../domain/readings.ts'
import type { PositionKind } from '../../domain/register.ts'
import type { DbOrTx } from '../client.server.ts'
import {
  channel,
  channelMap,
  fitting,
  instrument,
  person,
  position,
  reading,
  segment,
  source,
  typedReading,
} from '../schema/index.ts'
import { insertDue } from './rollups.server.ts'

/** Code of the source under which typed readings stand. */
const HAND = 'HAND'

export interface TypedSegment {
  id: number
  tag: string
  lineId: number
  startM: number
  endM: number
}

export async function findTypedSegment(db: DbOrTx, tag: string): Promise<TypedSegment | null> {
  const { id, lineId, startM, endM } = segment
  const [row] = await db
    .select({ id, tag: segment.tag, lineId, startM, endM })
    .from(segment)
    .where(eq(segment.tag, tag))
  return row ?? null
}

export interface TypedPosition {
  id: number
  tag: string
  kind: PositionKind
  quantity: Quantity
  label: string
  chainageM: number | null
}

/**
 * Positions in use that one reads when standing at a segment: its own, those of the tunnel beside it (oxygen), and those
 * that belong nowhere along the line (supply sets).
 */
export function listTypedPositions(
  db: DbOrTx,
  at: TypedSegment,
  quantities: readonly Quantity[],
  now: Date,
): Promise<TypedPosition[]> {
  const { id, tag, kind, quantity, label, chainageM } = position
  return db
    .select({ id, tag, kind, quantity, label, chainageM })
    .from(position)
    .where(
      and(
        inArray(position.quantity, [...quantities]),
        or(isNull(position.retiredAt), gt(position.retiredAt, now)),
        or(
          eq(position.segmentId, at.id),
          and(
            isNull(position.segmentId),
            eq(position.lineId, at.lineId),
            between(position.chainageM, at.startM, at.endM),
          ),
          and(isNull(position.segmentId), isNull(position.lineId)),
        ),
      ),
    )
    .orderBy(asc(position.quantity), asc(position.chainageM), asc(position.tag))
}

export interface TypedInstrument {
  id: number
  serial: string
  quantity: Quantity
  rangeMin: number | null
  rangeMax: number | null
}

const { id: instrumentId, serial, quantity, rangeMin, rangeMax } = instrument
const instrumentColumns = { id: instrumentId, serial, quantity, rangeMin, rangeMax }

/** The instrument that sat at a position at an instant. */
export async function findFitted(db: DbOrTx, positionId: number, at: Date): Promise<TypedInstrument | null> {
  const [row] = await db
    .select(instrumentColumns)
    .from(fitting)
    .innerJoin(instrument, eq(instrument.id, fitting.instrumentId))
    .where(
      and(
        eq(fitting.positionId, positionId),
        isNull(fitting.replacedAt),
        lte(fitting.startsAt, at),
        or(isNull(fitting.endsAt), gt(fitting.endsAt, at)),
      ),
    )
    .orderBy(desc(fitting.startsAt))
    .limit(1)
  return row ?? null
}

/** An instrument by its serial number, compared without case. */
export async function findInstrument(db: DbOrTx, serial: string): Promise<TypedInstrument | null> {
  const [row] = await db.select(instrumentColumns).from(instrument).where(eq(instrument.serial, serial))
  return row ?? null
}

/** Locks the source of typed readings until the transaction ends; makes it where the register has none. */
export async function lockHandSource(tx: DbOrTx): Promise<number> {
  await tx
    .insert(source)
    .values({ code: HAND, name: 'Typed by hand', dueAt: '', periodSeconds: 0 })
    .onDuplicateKeyUpdate({ set: { code: sql`code` } })
  const [row] = await tx.select({ id: source.id }).from(source).where(eq(source.code, HAND)).for('update')
  if (row === undefined) throw new Error('The source of typed readings is gone')
  return row.id
}

export interface HandChannel {
  id: number
  /** Where it belonged at the instant asked for; null for nowhere. */
  positionId: number | null
}

/** Channels of typed readings that may hold a position's reading: mapped to it at an instant, or called like it. */
export async function listHandChannels(
  tx: DbOrTx,
  hand: { sourceId: number; positionId: number; nameKey: string; at: Date },
): Promise<HandChannel[]> {
  return tx
    .select({ id: channel.id, positionId: channelMap.positionId })
    .from(channel)
    .leftJoin(
      channelMap,
      and(
        eq(channelMap.channelId, channel.id),
        isNull(channelMap.replacedAt),
        lte(channelMap.startsAt, hand.at),
        or(isNull(channelMap.endsAt), gt(channelMap.endsAt, hand.at)),
      ),
    )
    .where(
      and(
        eq(channel.sourceId, hand.sourceId),
        or(eq(channelMap.positionId, hand.positionId), eq(channel.nameKey, hand.nameKey)),
      ),
    )
}

/** Makes the channel of typed readings of a position, which it belongs to from an instant on. */
export async function insertHandChannel(
  tx: DbOrTx,
  row: typeof channel.$inferInsert,
  map: Omit<typeof channelMap.$inferInsert, 'channelId'>,
): Promise<number> {
  const [result] = await tx.insert(channel).values(row)
  await tx.insert(channelMap).values({ ...map, channelId: result.insertId })
  return result.insertId
}

/** What is stored for a channel at an instant. */
export function listReadingsAt(
  tx: DbOrTx,
  channelId: number,
  at: Date,
): Promise<{ seq: number; value: number | null; bound: number | null; quality: number }[]> {
  return tx
    .select({ seq: reading.seq, value: reading.value, bound: reading.bound, quality: reading.quality })
    .from(reading)
    .where(and(eq(reading.channelId, channelId), eq(reading.at, at)))
    .orderBy(asc(reading.seq))
}

export async function insertReading(tx: DbOrTx, row: typeof reading.$inferInsert): Promise<void> {
  await tx.insert(reading).values(row)
  await insertDue(tx, [{ channelId: row.channelId, from: row.at, last: row.at }])
}

/** Adds marks to everything stored for a channel at an instant. */
export async function markReadingsAt(tx: DbOrTx, channelId: number, at: Date, bits: number): Promise<void> {
  await tx
    .update(reading)
    .set({ marks: sql`${reading.marks} | ${bits}` })
    .where(and(eq(reading.channelId, channelId), eq(reading.at, at)))
}

export async function insertTypedReading(tx: DbOrTx, row: typeof typedReading.$inferInsert): Promise<number> {
  const [result] = await tx.insert(typedReading).values(row)
  return result.insertId
}

export interface TypedRow {
  id: number
  position: string
  at: Date
  valueText: string
  unit: string
  instrument: string
  note: string
  typedBy: string
  typedAt: Date
}

/** What was typed for some positions, the last typed first. */
export async function listTypedReadings(
  db: DbOrTx,
  positionIds: readonly number[],
  limit: number,
): Promise<TypedRow[]> {
  if (positionIds.length === 0) return []
  return db
    .select({
      id: typedReading.id,
      position: position.tag,
      at: typedReading.at,
      valueText: typedReading.valueText,
      unit: typedReading.unit,
      instrument: typedReading.instrumentText,
      note: typedReading.note,
      typedBy: person.name,
      typedAt: typedReading.typedAt,
    })
    .from(typedReading)
    .innerJoin(position, eq(position.id, typedReading.positionId))
    .innerJoin(person, eq(person.id, typedReading.typedBy))
    .where(inArray(typedReading.positionId, [...positionIds]))
    .orderBy(desc(typedReading.id))
    .limit(limit)
}
