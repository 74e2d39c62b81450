/** Writing and amending log entries. An entry is signed with the writer's own password and is never edited or deleted. */
import type { Db } from '../db/client.server.ts'
import {
  type Entry,
  findSegmentId,
  insertAmendment,
  insertEntry,
  listEntries,
} from '../db/queries/logbook.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import type { EntryKind } from '../domain/logbook.ts'
import { writeRecord } from './record.server.ts'
import { signAct, useSignedAct } from './signature.server.ts'

/** An entry may be dated this far ahead: clocks on site differ a little. */
const AHEAD_MS = 5 * 60_000

export interface NewEntry {
  /** Tag of the segment; empty for the facility as a whole. */
  segment: string
  kind: EntryKind
  eventAt: Date
  text: string
  onChart: boolean
  password: string
}

/**
 * Writes and signs an entry.
 *
 * @returns the entry's id
 * @throws DomainError forbidden, bad-input (unknown segment, an event in the future), signature-refused
 */
export async function writeEntry(db: Db, actor: Actor, now: Date, entry: NewEntry): Promise<number> {
  demand(actor, 'entry:write')
  if (entry.eventAt.getTime() > now.getTime() + AHEAD_MS) {
    throw new DomainError('bad-input', 'One field needs another look; nothing has been saved.', {
      fields: {
        eventAt: ['This lies in the future. An entry says what has happened; give the time it happened.'],
      },
    })
  }
  const segmentId = entry.segment === '' ? null : await findSegmentId(db, entry.segment)
  if (entry.segment !== '' && segmentId === null) {
    throw new DomainError('bad-input', 'One field needs another look; nothing has been saved.', {
      fields: { segment: [`The register has no segment ${entry.segment}. Choose one from the list.`] },
    })
  }
  const subject = { meaning: 'write a log entry', subjectKind: 'log-entry', subjectId: 'new' }
  const signed = await signAct(db, { actor, password: entry.password, now, ...subject })
  return tx(db, async (inside) => {
    const act = await useSignedAct(inside, signed, { actor, now, ...subject })
    const id = await insertEntry(inside, {
      segmentId,
      kind: entry.kind,
      eventAt: entry.eventAt,
      writtenAt: now,
      text: entry.text,
      authorId: actor.personId,
      onChart: entry.onChart,
      signedActId: act.id,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'log entry written',
      subjectKind: 'log-entry',
      subjectId: String(id),
      effectiveAt: entry.eventAt,
      after: { segment: entry.segment, kind: entry.kind, text: entry.text, onChart: entry.onChart },
      signedActId: act.id,
    })
    return id
  })
}

/** An entry with its amendments. */
export async function readEntry(db: Db, actor: Actor, entryId: number): Promise<Entry> {
  demand(actor, 'entry:view')
  const [entry] = await listEntries(db, { entryId, limit: 1 })
  if (entry === undefined) throw new DomainError('not-found', `There is no log entry ${entryId}.`)
  return entry
}

/**
 * Amends an entry: the new text holds from now on, the old one stays readable. People amend their own entries.
 *
 * @throws DomainError forbidden (somebody else's entry), not-found, bad-input (nothing changed), signature-refused
 */
export async function amendEntry(
  db: Db,
  actor: Actor,
  now: Date,
  entryId: number,
  amendment: { text: string; reason: string; password: string },
): Promise<void> {
  demand(actor, 'entry:write')
  const entry = await readEntry(db, actor, entryId)
  if (entry.authorId !== actor.personId) {
    throw new DomainError(
      'forbidden',
      `${entry.author} wrote this entry and can amend it. Write an entry of your own that refers to it.`,
    )
  }
  const before = entry.amendments.at(-1)?.text ?? entry.text
  if (before === amendment.text) {
    throw new DomainError('bad-input', 'One field needs another look; nothing has been saved.', {
      fields: { text: ['The text is the same as before. Change it, or leave the entry as it is.'] },
    })
  }
  const subject = { meaning: 'amend a log entry', subjectKind: 'log-entry', subjectId: String(entryId) }
  const signed = await signAct(db, { actor, password: amendment.password, now, ...subject })
  await tx(db, async (inside) => {
    const act = await useSignedAct(inside, signed, { actor, now, ...subject })
    await insertAmendment(inside, {
      entryId,
      text: amendment.text,
      reason: amendment.reason,
      writtenAt: now,
      authorId: actor.personId,
      signedActId: act.id,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'log entry amended',
      subjectKind: 'log-entry',
      subjectId: String(entryId),
      before: { text: before },
      after: { text: amendment.text },
      reason: amendment.reason,
      signedActId: act.id,
    })
  })
}
