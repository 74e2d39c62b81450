/** What the register's first page asks: how much there is of each kind, and where a word occurs in a tag. */
import { asc, like, or, sql } from 'drizzle-orm'
import type { MySqlColumn, MySqlTable } from 'drizzle-orm/mysql-core'
import type { RegisterKind } from '../../domain/schemas/register.ts'
import type { DbOrTx } from '../client.server.ts'
import {
  channel,
  equipment,
  heaterCircuit,
  instrument,
  position,
  pump,
  segment,
  source,
  supplySet,
  valve,
} from '../schema/index.ts'

interface Searched {
  table: MySqlTable
  id: MySqlColumn
  tag: MySqlColumn
  /** Other columns in which a word may stand. */
  more: readonly MySqlColumn[]
}

const SEARCHED: Record<Exclude<RegisterKind, 'limits'>, Searched> = {
  segments: { table: segment, id: segment.id, tag: segment.tag, more: [] },
  positions: { table: position, id: position.id, tag: position.tag, more: [position.label] },
  instruments: {
    table: instrument,
    id: instrument.id,
    tag: instrument.serial,
    more: [instrument.certificate, instrument.note],
  },
  channels: { table: channel, id: channel.id, tag: channel.name, more: [] },
  pumps: { table: pump, id: pump.id, tag: pump.tag, more: [pump.note] },
  valves: { table: valve, id: valve.id, tag: valve.tag, more: [valve.box, valve.note] },
  circuits: {
    table: heaterCircuit,
    id: heaterCircuit.id,
    tag: heaterCircuit.tag,
    more: [heaterCircuit.note],
  },
  'supply-sets': { table: supplySet, id: supplySet.id, tag: supplySet.tag, more: [supplySet.note] },
  sources: { table: source, id: source.id, tag: source.code, more: [source.name, source.note] },
  equipment: { table: equipment, id: equipment.id, tag: equipment.tag, more: [equipment.facts] },
}

export type CountedKind = keyof typeof SEARCHED
const COUNTED = Object.keys(SEARCHED) as CountedKind[]

/** How many there are of each kind. */
export async function countRegister(db: DbOrTx): Promise<Record<CountedKind, number>> {
  const counts = await Promise.all(
    COUNTED.map(async (kind) => {
      const rows = await db.select({ count: sql<number>`COUNT(*)` }).from(SEARCHED[kind].table)
      return [kind, Number(rows[0]?.count ?? 0)] as const
    }),
  )
  return Object.fromEntries(counts) as Record<CountedKind, number>
}

export interface TagHit {
  kind: CountedKind
  id: number
  tag: string
}

/** Things whose tag, name or note holds a word, by kind and tag; at most `limit` of each kind. */
export async function searchRegister(db: DbOrTx, words: string, limit: number): Promise<TagHit[]> {
  const pattern = `%${words.replace(/[\\%_]/g, (mark) => `\\${mark}`)}%`
  const found = await Promise.all(
    COUNTED.map(async (kind) => {
      const { table, id, tag, more } = SEARCHED[kind]
      const rows = await db
        .select({ id, tag })
        .from(table)
        .where(or(like(tag, pattern), ...more.map((column) => like(column, pattern))))
        .orderBy(asc(tag))
        .limit(limit)
      return rows.map((row): TagHit => ({ kind, id: Number(row.id), tag: String(row.tag) }))
    }),
  )
  return found.flat()
}

export type EquipmentRow = typeof equipment.$inferSelect

/** Equipment that is only looked up. */
export function listEquipment(db: DbOrTx): Promise<EquipmentRow[]> {
  return db.select().from(equipment).orderBy(asc(equipment.tag))
}
