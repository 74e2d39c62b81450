import { and, desc, eq, gte, inArray, like, lt, or, sql } from 'drizzle-orm'
import type { EntryKind } from '../../domain/logbook.ts'
import type { DbOrTx } from '../client.server.ts'
import { logAmendment, logEntry, person, segment } from '../schema/index.ts'

export interface Amendment {
  id: number
  text: string
  reason: string
  writtenAt: Date
  author: string
}

export interface Entry {
  id: number
  segmentId: number | null
  segmentTag: string | null
  kind: EntryKind
  eventAt: Date
  writtenAt: Date
  text: string
  authorId: number
  author: string
  onChart: boolean
  signed: boolean
  /** Oldest first; the last one is what holds. */
  amendments: Amendment[]
}

export interface EntryFilter {
  segmentId?: number
  kind?: EntryKind
  /** Found in the original text or in any amendment. */
  words?: string
  from?: Date
  to?: Date
  onChart?: boolean
  entryId?: number
  limit: number
  offset?: number
}

/** Entries, newest event first, with their amendments. */
export async function listEntries(db: DbOrTx, filter: EntryFilter): Promise<Entry[]> {
  const rows = await db
    .select({
      id: logEntry.id,
      segmentId: logEntry.segmentId,
      segmentTag: segment.tag,
      kind: logEntry.kind,
      eventAt: logEntry.eventAt,
      writtenAt: logEntry.writtenAt,
      text: logEntry.text,
      authorId: logEntry.authorId,
      author: person.name,
      onChart: logEntry.onChart,
      signedActId: logEntry.signedActId,
    })
    .from(logEntry)
    .innerJoin(person, eq(person.id, logEntry.authorId))
    .leftJoin(segment, eq(segment.id, logEntry.segmentId))
    .where(entryConditions(filter))
    .orderBy(desc(logEntry.eventAt), desc(logEntry.id))
    .limit(filter.limit)
    .offset(filter.offset ?? 0)
  const amendments = await listAmendments(
    db,
    rows.map(({ id }) => id),
  )
  return rows.map(({ signedActId, ...row }) => ({
    ...row,
    signed: signedActId !== null,
    amendments: amendments.get(row.id) ?? [],
  }))
}

/** How many entries a filter finds. */
export async function countEntries(db: DbOrTx, filter: EntryFilter): Promise<number> {
  const rows = await db.select({ count: sql<number>`COUNT(*)` }).from(logEntry).where(entryConditions(filter))
  return Number(rows[0]?.count ?? 0)
}

function entryConditions(filter: EntryFilter) {
  const pattern =
    filter.words === undefined ? undefined : `%${filter.words.replace(/[\\%_]/g, (mark) => `\\${mark}`)}%`
  return and(
    filter.entryId === undefined ? undefined : eq(logEntry.id, filter.entryId),
    filter.segmentId === undefined ? undefined : eq(logEntry.segmentId, filter.segmentId),
    filter.kind === undefined ? undefined : eq(logEntry.kind, filter.kind),
    filter.from === undefined ? undefined : gte(logEntry.eventAt, filter.from),
    filter.to === undefined ? undefined : lt(logEntry.eventAt, filter.to),
    filter.onChart === undefined ? undefined : eq(logEntry.onChart, filter.onChart),
    pattern === undefined
      ? undefined
      : or(
          like(logEntry.text, pattern),
          sql`EXISTS (SELECT 1 FROM ${logAmendment} WHERE ${logAmendment.entryId} = ${logEntry.id} AND ${logAmendment.text} LIKE ${pattern})`,
        ),
  )
}

async function listAmendments(db: DbOrTx, entryIds: readonly number[]): Promise<Map<number, Amendment[]>> {
  const found = new Map<number, Amendment[]>()
  if (entryIds.length === 0) return found
  const rows = await db
    .select({
      entryId: logAmendment.entryId,
      id: logAmendment.id,
      text: logAmendment.text,
      reason: logAmendment.reason,
      writtenAt: logAmendment.writtenAt,
      author: person.name,
    })
    .from(logAmendment)
    .innerJoin(person, eq(person.id, logAmendment.authorId))
    .where(inArray(logAmendment.entryId, [...entryIds]))
    .orderBy(logAmendment.id)
  for (const { entryId, ...amendment } of rows) found.set(entryId, [...(found.get(entryId) ?? []), amendment])
  return found
}

export async function insertEntry(db: DbOrTx, row: typeof logEntry.$inferInsert): Promise<number> {
  const [result] = await db.insert(logEntry).values(row)
  return result.insertId
}

export async function insertAmendment(db: DbOrTx, row: typeof logAmendment.$inferInsert): Promise<number> {
  const [result] = await db.insert(logAmendment).values(row)
  return result.insertId
}

/** The id of a segment by its tag, or null. */
export async function findSegmentId(db: DbOrTx, tag: string): Promise<number | null> {
  const rows = await db.select({ id: segment.id }).from(segment).where(eq(segment.tag, tag))
  return rows[0]?.id ?? null
}
