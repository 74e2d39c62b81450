/** Corrections of sources' clocks: their rows, and the SQL that lays them over readings when these are read. */
import { and, asc, desc, eq, inArray, isNull, type SQL, sql } from 'drizzle-orm'
import { alias } from 'drizzle-orm/mysql-core'
import { type ClockCorrection, ownStretches } from '../../domain/clock-correction.ts'
import type { DbOrTx } from '../client.server.ts'
import { channel, clockCorrection, person, reading } from '../schema/index.ts'

export interface ClockCorrectionRow {
  id: number
  startsAt: Date
  endsAt: Date
  startMs: number
  endMs: number
  basis: string
  recordedBy: string
  recordedAt: Date
  replacedAt: Date | null
  replacedBy: string | null
  replaceReason: string
}

/** Corrections of a source, newest beginning first, the replaced ones too. */
export function listClockCorrections(db: DbOrTx, sourceId: number): Promise<ClockCorrectionRow[]> {
  const replacer = alias(person, 'replacer')
  return db
    .select({
      id: clockCorrection.id,
      startsAt: clockCorrection.startsAt,
      endsAt: clockCorrection.endsAt,
      startMs: clockCorrection.startMs,
      endMs: clockCorrection.endMs,
      basis: clockCorrection.basis,
      recordedBy: person.name,
      recordedAt: clockCorrection.recordedAt,
      replacedAt: clockCorrection.replacedAt,
      replacedBy: replacer.name,
      replaceReason: clockCorrection.replaceReason,
    })
    .from(clockCorrection)
    .innerJoin(person, eq(person.id, clockCorrection.recordedBy))
    .leftJoin(replacer, eq(replacer.id, clockCorrection.replacedBy))
    .where(eq(clockCorrection.sourceId, sourceId))
    .orderBy(desc(clockCorrection.startsAt), desc(clockCorrection.id))
}

export async function insertClockCorrection(
  tx: DbOrTx,
  row: typeof clockCorrection.$inferInsert,
): Promise<void> {
  await tx.insert(clockCorrection).values(row)
}

export async function replaceClockCorrections(
  tx: DbOrTx,
  ids: readonly number[],
  by: { replacedAt: Date; replacedBy: number; replaceReason: string },
): Promise<void> {
  if (ids.length === 0) return
  await tx
    .update(clockCorrection)
    .set(by)
    .where(inArray(clockCorrection.id, [...ids]))
}

/** Corrections in force by channel. Channels whose clocks were never wrong are absent. */
export type Corrections = ReadonlyMap<number, readonly ClockCorrection[]>

/** What is in force now for these channels. */
export async function correctionsFor(db: DbOrTx, channelIds: readonly number[]): Promise<Corrections> {
  if (channelIds.length === 0) return new Map()
  const rows = await db
    .select({
      channelId: channel.id,
      startsAt: clockCorrection.startsAt,
      endsAt: clockCorrection.endsAt,
      startMs: clockCorrection.startMs,
      endMs: clockCorrection.endMs,
    })
    .from(clockCorrection)
    .innerJoin(channel, eq(channel.sourceId, clockCorrection.sourceId))
    .where(and(isNull(clockCorrection.replacedAt), inArray(channel.id, [...channelIds])))
    .orderBy(asc(clockCorrection.startsAt))
  const found = new Map<number, ClockCorrection[]>()
  for (const row of rows) {
    const own = found.get(row.channelId) ?? []
    own.push({
      startsMs: row.startsAt.getTime(),
      endsMs: row.endsAt.getTime(),
      startOffsetMs: row.startMs,
      endOffsetMs: row.endMs,
    })
    found.set(row.channelId, own)
  }
  return found
}

/** Readings of channels over a stretch of true time: which rows those are, and what their true time is. */
export interface ReadingPart {
  where: SQL
  at: SQL
}

/**
 * Which stored readings of channels truly lie in [from, to), in parts of one and the same correction each. Without any
 * that is one part, and their own time.
 */
export function readingParts(
  corrections: Corrections,
  channelIds: readonly number[],
  from: Date,
  to: Date,
): ReadingPart[] {
  // Channels of one source have one list of corrections in content; they go together, or a page would be many parts.
  const groups = new Map<string, { list: readonly ClockCorrection[]; ids: number[] }>()
  for (const id of channelIds) {
    const list = corrections.get(id) ?? []
    const key = JSON.stringify(list)
    const group = groups.get(key) ?? { list, ids: [] }
    group.ids.push(id)
    groups.set(key, group)
  }
  return [...groups.values()].flatMap(({ list, ids }) =>
    ownStretches(list, from.getTime(), to.getTime()).map(({ fromMs, toMs, correction }) => ({
      where: sql`${reading.channelId} IN ${ids} AND ${reading.at} >= ${new Date(fromMs)} AND ${reading.at} < ${new Date(toMs)}`,
      at: trueAt(correction),
    })),
  )
}

/** True time of a reading in SQL: step by step what `withOffset` does. */
function trueAt(correction: ClockCorrection | null): SQL {
  if (correction === null) return sql`${reading.at}`
  const { startsMs, endsMs, startOffsetMs, endOffsetMs } = correction
  const elapsed = sql`(TIMESTAMPDIFF(MICROSECOND, ${new Date(startsMs)}, ${reading.at}) DIV 1000)`
  // With an exponent these are doubles, as in the product; without one the database would count in decimals.
  const [change, length] = [asDouble(endOffsetMs - startOffsetMs), asDouble(endsMs - startsMs)]
  return sql`(${reading.at} + INTERVAL (${startOffsetMs} + FLOOR(${elapsed} * ${change} / ${length} + 5e-1)) * 1000 MICROSECOND)`
}

function asDouble(whole: number): SQL {
  return sql.raw(`${whole}e0`)
}
