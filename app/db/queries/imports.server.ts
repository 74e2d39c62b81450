/** Night files on their way in: the original bytes, the rows of the intake, and what is needed to read them. */
import { and, asc, desc, eq, gt, gte, inArray, isNull, lte, ne, or, sql } from 'drizzle-orm'
import { alias } from 'drizzle-orm/mysql-core'
import type { ImportState } from '../../domain/imports.ts'
import type { Quantity } from '../../domain/readings.ts'
import type { DbOrTx } from '../client.server.ts'
import {
  attachment,
  attachmentChunk,
  channel,
  channelMap,
  importFile,
  person,
  position,
  reading,
  segment,
  source,
} from '../schema/index.ts'

export interface SourceRow {
  id: number
  code: string
  name: string
  periodSeconds: number
  dueAt: string
  profile: unknown
}

const sourceColumns = {
  id: source.id,
  code: source.code,
  name: source.name,
  periodSeconds: source.periodSeconds,
  dueAt: source.dueAt,
  profile: source.profile,
}

/** Sources that are on, in order of their codes. */
export function listSources(db: DbOrTx): Promise<SourceRow[]> {
  return db.select(sourceColumns).from(source).where(isNull(source.offSince)).orderBy(asc(source.code))
}

/** A source by its code; null when there is none. */
export async function findSource(db: DbOrTx, code: string): Promise<SourceRow | null> {
  const [row] = await db.select(sourceColumns).from(source).where(eq(source.code, code))
  return row ?? null
}

/** Locks a source until the transaction ends, so that its files are taken in one after the other. */
export async function lockSource(tx: DbOrTx, sourceId: number): Promise<SourceRow | null> {
  const [row] = await tx.select(sourceColumns).from(source).where(eq(source.id, sourceId)).for('update')
  return row ?? null
}

export interface SourceChannel {
  id: number
  name: string
  quantity: Quantity
  ignored: boolean
  /** First instant that a map of the channel covers; null without a map. */
  fromAt: Date | null
  /** End of its last map; null without a map, and while one is open. */
  untilAt: Date | null
}

/** Raw channels of a source as the register has them. */
export async function listSourceChannels(db: DbOrTx, sourceId: number): Promise<SourceChannel[]> {
  const rows = await db
    .select({
      id: channel.id,
      name: channel.name,
      quantity: channel.quantity,
      ignoredSince: channel.ignoredSince,
      fromAt: sql<Date | null>`min(${channelMap.startsAt})`.mapWith(channelMap.startsAt),
      untilAt:
        sql<Date | null>`if(count(*) = count(${channelMap.endsAt}), max(${channelMap.endsAt}), null)`.mapWith(
          channelMap.startsAt,
        ),
    })
    .from(channel)
    .leftJoin(channelMap, and(eq(channelMap.channelId, channel.id), isNull(channelMap.replacedAt)))
    .where(eq(channel.sourceId, sourceId))
    .groupBy(channel.id)
    .orderBy(asc(channel.name))
  return rows.map(({ ignoredSince, ...row }) => ({ ...row, ignored: ignoredSince !== null }))
}

const CHUNK_LIMIT = 1024 * 1024

/** Begins to keep a file; it counts as nothing until `finishOriginal`. */
export async function beginOriginal(
  db: DbOrTx,
  input: { fileName: string; createdBy: number | null; createdAt: Date },
): Promise<number> {
  const [result] = await db.insert(attachment).values({
    ...input,
    contentType: 'application/octet-stream',
    byteSize: 0,
    sha256: '',
    complete: false,
    subjectKind: 'import',
    subjectId: '',
  })
  return result.insertId
}

/** Keeps one piece of at most 1 MiB. */
export async function writeOriginalChunk(
  db: DbOrTx,
  attachmentId: number,
  chunkNo: number,
  data: Uint8Array,
): Promise<void> {
  if (data.length > CHUNK_LIMIT)
    throw new RangeError(`A piece of ${data.length} bytes is more than ${CHUNK_LIMIT}`)
  await db.insert(attachmentChunk).values({ attachmentId, chunkNo, data })
}

export async function finishOriginal(
  tx: DbOrTx,
  attachmentId: number,
  facts: { byteSize: number; sha256: string; subjectId: string },
): Promise<void> {
  await tx
    .update(attachment)
    .set({ ...facts, complete: true })
    .where(eq(attachment.id, attachmentId))
}

/** Throws away what has been kept of a file that did not arrive whole or is held already. */
export async function dropOriginal(db: DbOrTx, attachmentId: number): Promise<void> {
  await db.delete(attachmentChunk).where(eq(attachmentChunk.attachmentId, attachmentId))
  await db.delete(attachment).where(eq(attachment.id, attachmentId))
}

/** Bytes of a kept file, piece by piece. */
export async function* readOriginal(db: DbOrTx, attachmentId: number | null): AsyncGenerator<Uint8Array> {
  if (attachmentId === null) return
  for (let chunkNo = 0; ; chunkNo += 1) {
    const [row] = await db
      .select({ data: attachmentChunk.data })
      .from(attachmentChunk)
      .where(and(eq(attachmentChunk.attachmentId, attachmentId), eq(attachmentChunk.chunkNo, chunkNo)))
    if (row === undefined) return
    yield row.data
  }
}

export interface ImportRow {
  id: number
  state: ImportState
  sourceId: number
  sourceCode: string
  sourceName: string
  fileName: string
  byteSize: number
  sha256: string
  attachmentId: number | null
  uploadedBy: string
  uploadedAt: Date
  readOut: unknown
  lineCount: number | null
  readingCount: number | null
  heldCount: number | null
  conflictCount: number | null
  firstAt: Date | null
  lastAt: Date | null
  decidedBy: string | null
  decidedAt: Date | null
  reason: string
  /** Bytes that the worker has read of a large file. */
  bytesDone: number
  /** Who asked the worker to take it in, while it has not. */
  takingInBy: number | null
  /** Why the worker could not do what it was asked. */
  fault: string
}

const uploader = alias(person, 'uploader')
const decider = alias(person, 'decider')

const importColumns = {
  id: importFile.id,
  state: importFile.state,
  sourceId: sql<number>`${importFile.sourceId}`.mapWith(Number),
  sourceCode: source.code,
  sourceName: source.name,
  fileName: importFile.fileName,
  byteSize: importFile.byteSize,
  sha256: importFile.sha256,
  attachmentId: importFile.attachmentId,
  uploadedBy: sql<string>`coalesce(${uploader.name}, '')`,
  uploadedAt: importFile.uploadedAt,
  lineCount: importFile.lineCount,
  readingCount: importFile.readingCount,
  heldCount: importFile.heldCount,
  conflictCount: importFile.conflictCount,
  firstAt: importFile.firstAt,
  lastAt: importFile.lastAt,
  decidedBy: decider.name,
  decidedAt: importFile.decidedAt,
  reason: importFile.reason,
  bytesDone: importFile.bytesDone,
  takingInBy: importFile.takingInBy,
  fault: importFile.fault,
}

function selectImports(db: DbOrTx) {
  return db
    .select(importColumns)
    .from(importFile)
    .innerJoin(source, eq(source.id, importFile.sourceId))
    .leftJoin(uploader, eq(uploader.id, importFile.uploadedBy))
    .leftJoin(decider, eq(decider.id, importFile.decidedBy))
}

/** One import with its report; null when there is none with this number. */
export async function findImport(db: DbOrTx, importId: number): Promise<ImportRow | null> {
  const [row] = await selectImports(db).where(eq(importFile.id, importId))
  if (row === undefined) return null
  const [report] = await db
    .select({ readOut: importFile.readOut })
    .from(importFile)
    .where(eq(importFile.id, importId))
  return { ...row, readOut: report?.readOut ?? null }
}

export type ImportListRow = Omit<ImportRow, 'readOut'>

/** Files, the last to arrive first. Posts of live readings are no files that anybody looks for. */
export function listImports(db: DbOrTx, limit: number): Promise<ImportListRow[]> {
  return selectImports(db).where(eq(importFile.arrival, 'file')).orderBy(desc(importFile.id)).limit(limit)
}

/** Files that came in or end after an instant, for the nights of the overview; a live post is no night's file. */
export function listImportsSince(db: DbOrTx, since: Date): Promise<ImportListRow[]> {
  return selectImports(db)
    .where(
      and(
        eq(importFile.arrival, 'file'),
        or(gte(importFile.lastAt, since), gte(importFile.uploadedAt, since)),
      ),
    )
    .orderBy(desc(importFile.id))
}

/** Sources that have sent a file at least once. */
export async function listSourcesHeardOf(db: DbOrTx): Promise<Set<number>> {
  const rows = await db
    .selectDistinct({ id: importFile.sourceId })
    .from(importFile)
    .where(eq(importFile.arrival, 'file'))
  return new Set(rows.flatMap(({ id }) => (id === null ? [] : [id])))
}

/** The newest import of these bytes in one of the states. */
export async function findSameBytes(
  db: DbOrTx,
  sha256: string,
  states: readonly ImportState[],
): Promise<ImportListRow | null> {
  const [row] = await selectImports(db)
    .where(and(eq(importFile.sha256, sha256), inArray(importFile.state, [...states])))
    .orderBy(desc(importFile.id))
    .limit(1)
  return row ?? null
}

/** The last other file of the same source and name with other bytes that has not been discarded or withdrawn. */
export async function findSameName(
  db: DbOrTx,
  file: Pick<ImportRow, 'id' | 'sourceId' | 'fileName' | 'sha256'>,
): Promise<ImportListRow | null> {
  const [row] = await selectImports(db)
    .where(
      and(
        eq(importFile.sourceId, file.sourceId),
        eq(importFile.fileName, file.fileName),
        eq(importFile.arrival, 'file'),
        ne(importFile.id, file.id),
        ne(importFile.sha256, file.sha256),
        inArray(importFile.state, ['read', 'refused', 'accepted']),
      ),
    )
    .orderBy(desc(importFile.id))
    .limit(1)
  return row ?? null
}

/** Files that wait and have a question without whose answer they cannot be taken in. */
export async function listQuestioned(db: DbOrTx): Promise<Set<number>> {
  const rows = await db
    .select({ id: importFile.id })
    .from(importFile)
    .where(
      and(eq(importFile.state, 'read'), sql`json_value(${importFile.readOut}, '$.state') = 'needs-answers'`),
    )
  return new Set(rows.map(({ id }) => id))
}

export async function insertImport(tx: DbOrTx, row: typeof importFile.$inferInsert): Promise<number> {
  const [result] = await tx.insert(importFile).values(row)
  return result.insertId
}

/** Locks an import until the transaction ends and says where it stands. */
export async function lockImport(tx: DbOrTx, importId: number): Promise<ImportState | null> {
  const [row] = await tx
    .select({ state: importFile.state })
    .from(importFile)
    .where(eq(importFile.id, importId))
    .for('update')
  return row?.state ?? null
}

export async function updateImport(
  tx: DbOrTx,
  importId: number,
  set: Partial<typeof importFile.$inferInsert>,
): Promise<void> {
  await tx
    .update(importFile)
    .set({ ...set, revision: sql`${importFile.revision} + 1` })
    .where(eq(importFile.id, importId))
}

export interface ChannelTarget {
  channel: string
  position: string
  segment: string | null
}

/** Where the channels of a source belonged at an instant, by the maps in force. */
export function listChannelTargets(db: DbOrTx, sourceId: number, at: Date): Promise<ChannelTarget[]> {
  return db
    .select({ channel: channel.name, position: position.tag, segment: segment.tag })
    .from(channelMap)
    .innerJoin(channel, eq(channel.id, channelMap.channelId))
    .innerJoin(position, eq(position.id, channelMap.positionId))
    .leftJoin(segment, eq(segment.id, position.segmentId))
    .where(
      and(
        eq(channel.sourceId, sourceId),
        isNull(channelMap.replacedAt),
        lte(channelMap.startsAt, at),
        or(isNull(channelMap.endsAt), gt(channelMap.endsAt, at)),
      ),
    )
}

/** Readings of a source that are stored for a stretch of time, both ends included. */
export async function countHeld(db: DbOrTx, sourceId: number, from: Date, to: Date): Promise<number> {
  const [row] = await db
    .select({ n: sql`COUNT(*)`.mapWith(Number) })
    .from(reading)
    .innerJoin(channel, eq(channel.id, reading.channelId))
    .where(and(eq(channel.sourceId, sourceId), gte(reading.at, from), lte(reading.at, to)))
  return row?.n ?? 0
}
