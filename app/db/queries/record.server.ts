import { and, desc, eq, lt } from 'drizzle-orm'
import type { DbOrTx } from '../client.server.ts'
import { person, record } from '../schema/index.ts'

export interface RecordFilter {
  subjectKind?: string
  subjectId?: string
  personId?: number
  beforeId?: number
  limit: number
}

export interface RecordRow {
  id: number
  at: Date
  machineAt: Date
  person: string | null
  act: string
  subjectKind: string
  subjectId: string
  effectiveAt: Date | null
  before: unknown
  after: unknown
  reason: string
  signed: boolean
}

export async function insertRecord(tx: DbOrTx, row: typeof record.$inferInsert): Promise<void> {
  await tx.insert(record).values(row)
}

/** Lines of the record, newest first. */
export async function listRecordRows(db: DbOrTx, filter: RecordFilter): Promise<RecordRow[]> {
  const rows = await db
    .select({
      id: record.id,
      at: record.at,
      machineAt: record.machineAt,
      person: person.name,
      act: record.act,
      subjectKind: record.subjectKind,
      subjectId: record.subjectId,
      effectiveAt: record.effectiveAt,
      before: record.before,
      after: record.after,
      reason: record.reason,
      signedActId: record.signedActId,
    })
    .from(record)
    .leftJoin(person, eq(person.id, record.personId))
    .where(
      and(
        filter.subjectKind === undefined ? undefined : eq(record.subjectKind, filter.subjectKind),
        filter.subjectId === undefined ? undefined : eq(record.subjectId, filter.subjectId),
        filter.personId === undefined ? undefined : eq(record.personId, filter.personId),
        filter.beforeId === undefined ? undefined : lt(record.id, filter.beforeId),
      ),
    )
    .orderBy(desc(record.id))
    .limit(filter.limit)
  return rows.map(({ signedActId, ...row }) => ({ ...row, signed: signedActId !== null }))
}
