/** The record: who changed what, when, before and after. Appended to, never changed (triggers refuse it). */
import type { DbOrTx } from '../db/client.server.ts'
import {
  insertRecord,
  listRecordRows,
  type RecordFilter,
  type RecordRow,
} from '../db/queries/record.server.ts'
import type { Actor } from '../domain/actor.ts'
import { machineNow } from '../machine-time.server.ts'

export interface RecordEntry {
  /** Product time of the act. */
  at: Date
  /** Null when the product itself did it (an expiry, a seed). */
  actor: Actor | null
  act: string
  subjectKind: string
  subjectId: string
  /** Objects or lists: a bare text cannot be told from unparsed JSON when it is read back. */
  before?: object | null
  after?: object | null
  reason?: string
  effectiveAt?: Date | null
  signedActId?: number | null
}

/** Appends one line to the record, inside the transaction that makes the change. */
export async function writeRecord(tx: DbOrTx, entry: RecordEntry): Promise<void> {
  await insertRecord(tx, {
    at: entry.at,
    machineAt: machineNow(),
    personId: entry.actor?.personId ?? null,
    act: entry.act,
    subjectKind: entry.subjectKind,
    subjectId: entry.subjectId,
    effectiveAt: entry.effectiveAt ?? null,
    before: entry.before ?? null,
    after: entry.after ?? null,
    reason: entry.reason ?? '',
    signedActId: entry.signedActId ?? null,
  })
}

/** The record of one thing or of everybody's acts, newest first. Page on with `beforeId`. */
export function listRecord(db: DbOrTx, filter: RecordFilter): Promise<RecordRow[]> {
  return listRecordRows(db, filter)
}
