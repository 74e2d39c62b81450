/** Reading, locking, adding and updating one row of the register, the same way for every kind that has a revision. */
import { asc, eq, sql } from 'drizzle-orm'
import type { MySqlColumn, MySqlTable } from 'drizzle-orm/mysql-core'
import type { EditedKind } from '../../domain/schemas/register.ts'
import type { DbOrTx } from '../client.server.ts'
import {
  heaterCircuit,
  instrument,
  line,
  position,
  pump,
  segment,
  source,
  supplySet,
  valve,
} from '../schema/index.ts'

interface KindTable {
  table: MySqlTable
  id: MySqlColumn
  /** Column with the name people know the thing by. */
  tag: MySqlColumn
  revision: MySqlColumn
}

const TABLES: Record<EditedKind, KindTable> = {
  segments: { table: segment, id: segment.id, tag: segment.tag, revision: segment.revision },
  positions: { table: position, id: position.id, tag: position.tag, revision: position.revision },
  instruments: {
    table: instrument,
    id: instrument.id,
    tag: instrument.serial,
    revision: instrument.revision,
  },
  pumps: { table: pump, id: pump.id, tag: pump.tag, revision: pump.revision },
  valves: { table: valve, id: valve.id, tag: valve.tag, revision: valve.revision },
  circuits: {
    table: heaterCircuit,
    id: heaterCircuit.id,
    tag: heaterCircuit.tag,
    revision: heaterCircuit.revision,
  },
  'supply-sets': { table: supplySet, id: supplySet.id, tag: supplySet.tag, revision: supplySet.revision },
  sources: { table: source, id: source.id, tag: source.code, revision: source.revision },
}

/** A row with its columns under their names in the schema. */
export interface RegisterRow {
  id: number
  tag: string
  revision: number
  columns: Record<string, unknown>
}

function toRow(kind: EditedKind, columns: Record<string, unknown>): RegisterRow {
  const tag = columns[tagColumn(kind)]
  return { id: Number(columns.id), tag: String(tag), revision: Number(columns.revision), columns }
}

/** Name that the tag's column has in the schema. */
function tagColumn(kind: EditedKind): string {
  return kind === 'instruments' ? 'serial' : kind === 'sources' ? 'code' : 'tag'
}

/** Every row of a kind, by tag. */
export async function listRegisterRows(db: DbOrTx, kind: EditedKind): Promise<RegisterRow[]> {
  const { table, tag } = TABLES[kind]
  const rows = await db.select().from(table).orderBy(asc(tag))
  return rows.map((columns) => toRow(kind, columns))
}

/** One row by tag, or null. */
export async function findRegisterRow(
  db: DbOrTx,
  kind: EditedKind,
  tag: string,
): Promise<RegisterRow | null> {
  const { table, tag: column } = TABLES[kind]
  const rows = await db.select().from(table).where(eq(column, tag))
  return rows[0] === undefined ? null : toRow(kind, rows[0])
}

/** One row by tag, locked until the transaction ends, or null. */
export async function lockRegisterRow(
  tx: DbOrTx,
  kind: EditedKind,
  tag: string,
): Promise<RegisterRow | null> {
  const { table, tag: column } = TABLES[kind]
  const rows = await tx.select().from(table).where(eq(column, tag)).for('update')
  return rows[0] === undefined ? null : toRow(kind, rows[0])
}

/** Stores new values and counts the revision up. */
export async function updateRegisterRow(
  tx: DbOrTx,
  kind: EditedKind,
  id: number,
  columns: Record<string, unknown>,
): Promise<void> {
  const { table, id: idColumn, revision } = TABLES[kind]
  await tx
    .update(table)
    .set({ ...columns, revision: sql`${revision} + 1` })
    .where(eq(idColumn, id))
}

/** Adds a row under a tag; a tag that is taken breaks the unique key. */
export async function insertRegisterRow(
  tx: DbOrTx,
  kind: EditedKind,
  tag: string,
  columns: Record<string, unknown>,
): Promise<number> {
  const [result] = await tx.insert(TABLES[kind].table).values({ ...columns, [tagColumn(kind)]: tag })
  return result.insertId
}

export interface SegmentPlace {
  id: number
  tag: string
  lineId: number
  startM: number
  endM: number
}

/** Where every segment lies, in order along the lines. */
export function listSegmentPlaces(db: DbOrTx): Promise<SegmentPlace[]> {
  return db
    .select({
      id: segment.id,
      tag: segment.tag,
      lineId: segment.lineId,
      startM: segment.startM,
      endM: segment.endM,
    })
    .from(segment)
    .innerJoin(line, eq(line.id, segment.lineId))
    .orderBy(asc(line.sortOrder), asc(segment.sortOrder))
}

/** Locks a line's row, so that two edits of its segments come one after the other. */
export async function lockLine(
  tx: DbOrTx,
  lineId: number,
): Promise<{ code: string; lengthM: number } | null> {
  const rows = await tx
    .select({ code: line.code, lengthM: line.lengthM })
    .from(line)
    .where(eq(line.id, lineId))
    .for('update')
  return rows[0] ?? null
}
