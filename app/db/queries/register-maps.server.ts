/** Dated rows that lead from a channel to a position and from a position to an instrument. Rows in force are those not replaced. */
import { and, asc, desc, eq, inArray, isNull, sql } from 'drizzle-orm'
import type { Quantity } from '../../domain/readings.ts'
import type { DbOrTx } from '../client.server.ts'
import { channel, channelMap, fitting, instrument, person, position, source } from '../schema/index.ts'

export interface ChannelFacts {
  id: number
  name: string
  sourceId: number
  sourceCode: string
  quantity: Quantity
  basis: string
  ignoredSince: Date | null
}

/** Channels with their sources, by source and name. */
export function listChannels(db: DbOrTx, channelId?: number): Promise<ChannelFacts[]> {
  return db
    .select({
      id: channel.id,
      name: channel.name,
      sourceId: channel.sourceId,
      sourceCode: source.code,
      quantity: channel.quantity,
      basis: channel.basis,
      ignoredSince: channel.ignoredSince,
    })
    .from(channel)
    .innerJoin(source, eq(source.id, channel.sourceId))
    .where(channelId === undefined ? undefined : eq(channel.id, channelId))
    .orderBy(asc(source.code), asc(channel.name))
}

export interface MapRow {
  id: number
  channelId: number
  channel: string
  sourceId: number
  sourceCode: string
  positionId: number
  position: string
  startsAt: Date
  endsAt: Date | null
  reason: string
  recordedBy: string | null
  recordedAt: Date
  replacedAt: Date | null
}

/** Channel maps of a channel, a position or a source, newest beginning first; the replaced ones too when asked for. */
export function listMaps(
  db: DbOrTx,
  filter: { channelId?: number; positionId?: number; sourceId?: number; withReplaced?: boolean },
): Promise<MapRow[]> {
  return db
    .select({
      id: channelMap.id,
      channelId: channelMap.channelId,
      channel: channel.name,
      sourceId: channel.sourceId,
      sourceCode: source.code,
      positionId: channelMap.positionId,
      position: position.tag,
      startsAt: channelMap.startsAt,
      endsAt: channelMap.endsAt,
      reason: channelMap.reason,
      recordedBy: person.name,
      recordedAt: channelMap.recordedAt,
      replacedAt: channelMap.replacedAt,
    })
    .from(channelMap)
    .innerJoin(channel, eq(channel.id, channelMap.channelId))
    .innerJoin(source, eq(source.id, channel.sourceId))
    .innerJoin(position, eq(position.id, channelMap.positionId))
    .leftJoin(person, eq(person.id, channelMap.recordedBy))
    .where(
      and(
        filter.channelId === undefined ? undefined : eq(channelMap.channelId, filter.channelId),
        filter.positionId === undefined ? undefined : eq(channelMap.positionId, filter.positionId),
        filter.sourceId === undefined ? undefined : eq(channel.sourceId, filter.sourceId),
        filter.withReplaced ? undefined : isNull(channelMap.replacedAt),
      ),
    )
    .orderBy(desc(channelMap.startsAt), desc(channelMap.id))
}

/** How many maps a position has or ever had. */
export async function countMapsOfPosition(db: DbOrTx, positionId: number): Promise<number> {
  const rows = await db
    .select({ count: sql<number>`COUNT(*)` })
    .from(channelMap)
    .where(eq(channelMap.positionId, positionId))
  return Number(rows[0]?.count ?? 0)
}

/** Locks a source, so that two changes to the maps of its channels come one after the other. */
export async function lockSource(tx: DbOrTx, sourceId: number): Promise<void> {
  await tx.select({ id: source.id }).from(source).where(eq(source.id, sourceId)).for('update')
}

/** Locks an instrument, so that two people cannot put it into two places. */
export async function lockInstrument(tx: DbOrTx, id: number): Promise<void> {
  await tx.select({ id: instrument.id }).from(instrument).where(eq(instrument.id, id)).for('update')
}

export async function insertMap(tx: DbOrTx, row: typeof channelMap.$inferInsert): Promise<void> {
  await tx.insert(channelMap).values(row)
}

export async function replaceMaps(tx: DbOrTx, ids: readonly number[], at: Date): Promise<void> {
  if (ids.length === 0) return
  await tx
    .update(channelMap)
    .set({ replacedAt: at })
    .where(inArray(channelMap.id, [...ids]))
}

export interface FittingRow {
  id: number
  positionId: number
  position: string
  instrumentId: number
  serial: string
  factor: number
  startsAt: Date
  endsAt: Date | null
  reason: string
  recordedBy: string | null
  recordedAt: Date
  replacedAt: Date | null
}

/** Fittings of a position or an instrument, newest beginning first; the replaced ones too when asked for. */
export function listFittings(
  db: DbOrTx,
  filter: { positionId?: number; instrumentId?: number; withReplaced?: boolean },
): Promise<FittingRow[]> {
  return db
    .select({
      id: fitting.id,
      positionId: fitting.positionId,
      position: position.tag,
      instrumentId: fitting.instrumentId,
      serial: instrument.serial,
      factor: fitting.factor,
      startsAt: fitting.startsAt,
      endsAt: fitting.endsAt,
      reason: fitting.reason,
      recordedBy: person.name,
      recordedAt: fitting.recordedAt,
      replacedAt: fitting.replacedAt,
    })
    .from(fitting)
    .innerJoin(position, eq(position.id, fitting.positionId))
    .innerJoin(instrument, eq(instrument.id, fitting.instrumentId))
    .leftJoin(person, eq(person.id, fitting.recordedBy))
    .where(
      and(
        filter.positionId === undefined ? undefined : eq(fitting.positionId, filter.positionId),
        filter.instrumentId === undefined ? undefined : eq(fitting.instrumentId, filter.instrumentId),
        filter.withReplaced ? undefined : isNull(fitting.replacedAt),
      ),
    )
    .orderBy(desc(fitting.startsAt), desc(fitting.id))
}

export async function insertFitting(tx: DbOrTx, row: typeof fitting.$inferInsert): Promise<void> {
  await tx.insert(fitting).values(row)
}

export async function replaceFittings(tx: DbOrTx, ids: readonly number[], at: Date): Promise<void> {
  if (ids.length === 0) return
  await tx
    .update(fitting)
    .set({ replacedAt: at })
    .where(inArray(fitting.id, [...ids]))
}
