/**
 * Withdrawing an accepted import. Somebody asks and says why, an engineer agrees, an administrator does it; whoever
 * agrees is neither the one who asks nor the one who does it. The readings leave curves, limits and fits at once and
 * stay with the import.
 */
import type { Db, DbOrTx } from '../db/client.server.ts'
import { isDuplicate } from '../db/errors.server.ts'
import {
  findImport,
  type ImportRow,
  lockImport,
  lockSource,
  updateImport,
} from '../db/queries/imports.server.ts'
import {
  findOpenWish,
  insertWish,
  listWishes,
  updateWish,
  type WishRow,
} from '../db/queries/imports-wishes.server.ts'
import { importStretches, takeOutReadings } from '../db/queries/imports-withdraw.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand, may } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { IMPORT_STATE_LABELS } from '../domain/imports.ts'
import { enqueue } from './jobs.server.ts'
import { writeRecord } from './record.server.ts'
import { markOutOfDate } from './revisions.server.ts'

export interface Withdrawn {
  /** Readings taken out. */
  withdrawn: number
  /** Of those, readings that stay because another import brought them as well. */
  restored: number
  /** Curves, alerts and reports that rest on them and are now out of date. */
  outOfDate: number
}

export interface WithdrawalPageData {
  file: Pick<
    ImportRow,
    'id' | 'state' | 'fileName' | 'sourceCode' | 'sourceName' | 'readingCount' | 'firstAt' | 'lastAt'
  >
  /** The newest first. */
  wishes: WishRow[]
  /** What this person may do now. */
  may: { ask: boolean; agree: boolean; refuse: boolean; withdraw: boolean }
}

/**
 * An import, the wishes to withdraw it, and what the reader may do about them.
 *
 * @throws DomainError forbidden, not-found
 */
export async function readWithdrawalPage(
  db: Db,
  actor: Actor,
  importId: number,
): Promise<WithdrawalPageData> {
  demand(actor, 'facility:view')
  const file = await importOr404(db, importId)
  const wishes = await listWishes(db, importId)
  const open = wishes.find(({ state }) => state === 'asked' || state === 'agreed')
  const accepted = file.state === 'accepted'
  return {
    file: {
      id: file.id,
      state: file.state,
      fileName: file.fileName,
      sourceCode: file.sourceCode,
      sourceName: file.sourceName,
      readingCount: file.readingCount,
      firstAt: file.firstAt,
      lastAt: file.lastAt,
    },
    wishes,
    may: {
      ask: accepted && open === undefined && may(actor, 'intake:ask-withdrawal'),
      agree:
        open?.state === 'asked' && open.askedById !== actor.personId && may(actor, 'intake:agree-withdrawal'),
      refuse: open !== undefined && mayTurnDown(actor, open),
      withdraw:
        open?.state === 'agreed' && open.agreedById !== actor.personId && may(actor, 'intake:withdraw'),
    },
  }
}

/**
 * Asks for an accepted import to be withdrawn.
 *
 * @throws DomainError forbidden, not-found; conflict (not accepted, or somebody has asked already)
 */
export async function askWithdrawal(
  db: Db,
  actor: Actor,
  now: Date,
  importId: number,
  reason: string,
): Promise<void> {
  demand(actor, 'intake:ask-withdrawal')
  await importOr404(db, importId)
  try {
    await tx(db, async (inside) => {
      await demandAccepted(inside, importId)
      await insertWish(inside, { importId, reason, askedBy: actor.personId, askedAt: now })
      await note(inside, actor, now, importId, 'withdrawal asked for', reason)
    })
  } catch (error) {
    if (!isDuplicate(error)) throw error
    const open = await findOpenWish(db, importId)
    throw new DomainError(
      'conflict',
      `${open?.askedBy ?? 'Somebody'} has asked for this already. Nothing was changed.`,
    )
  }
}

/**
 * Agrees to a withdrawal that somebody else has asked for.
 *
 * @throws DomainError forbidden (also for whoever asked), not-found, conflict (nothing waits to be agreed to)
 */
export async function agreeWithdrawal(db: Db, actor: Actor, now: Date, importId: number): Promise<void> {
  demand(actor, 'intake:agree-withdrawal')
  await importOr404(db, importId)
  await tx(db, async (inside) => {
    await demandAccepted(inside, importId)
    const wish = await demandWish(inside, importId, 'asked')
    if (wish.askedById === actor.personId)
      throw new DomainError(
        'forbidden',
        'You asked for this withdrawal; another engineer has to agree to it.',
      )
    await updateWish(inside, wish.id, { state: 'agreed', agreedBy: actor.personId, agreedAt: now })
    await note(inside, actor, now, importId, 'withdrawal agreed to', wish.reason)
  })
}

/**
 * Turns a wish down: an engineer, an administrator, or whoever asked.
 *
 * @throws DomainError forbidden, not-found, conflict (no wish is open)
 */
export async function refuseWithdrawal(
  db: Db,
  actor: Actor,
  now: Date,
  importId: number,
  reason: string,
): Promise<void> {
  demand(actor, 'facility:view')
  await importOr404(db, importId)
  await tx(db, async (inside) => {
    await demandAccepted(inside, importId)
    const wish = await demandWish(inside, importId)
    if (!mayTurnDown(actor, wish)) demand(actor, 'intake:agree-withdrawal')
    await updateWish(inside, wish.id, {
      state: 'refused',
      openImportId: null,
      closedBy: actor.personId,
      closedAt: now,
      refusal: reason,
    })
    await note(inside, actor, now, importId, 'withdrawal turned down', reason)
  })
}

/**
 * Withdraws an import that an engineer has agreed to withdraw: its readings leave every curve, all of them at once, and
 * what rests on them is marked as out of date.
 *
 * @throws DomainError forbidden (also for whoever agreed), not-found, conflict (nobody has agreed, or it was done)
 */
export async function withdrawImport(db: Db, actor: Actor, now: Date, importId: number): Promise<Withdrawn> {
  demand(actor, 'intake:withdraw')
  const seen = await importOr404(db, importId)
  return tx(db, async (inside) => {
    // The source first, as when a file is taken in: the two must not wait for each other.
    await lockSource(inside, seen.sourceId)
    await demandAccepted(inside, importId)
    const wish = await demandWish(inside, importId, 'agreed')
    if (wish.agreedById === actor.personId)
      throw new DomainError('forbidden', 'You agreed to this withdrawal; another administrator has to do it.')
    await updateImport(inside, importId, { state: 'withdrawn', acceptedSha256: null })
    const stretches = await importStretches(inside, importId)
    const counts = await takeOutReadings(inside, importId)
    const marked = await markOutOfDate(inside, {
      stretches,
      now,
      reason: `Import ${importId} (${seen.fileName}) was withdrawn: ${wish.reason}`,
    })
    await enqueue(inside, { kind: 'roll-up', payload: {} })
    await updateWish(inside, wish.id, {
      state: 'done',
      openImportId: null,
      closedBy: actor.personId,
      closedAt: now,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'import withdrawn',
      subjectKind: 'import',
      subjectId: String(importId),
      before: { state: 'accepted' },
      after: {
        state: 'withdrawn',
        ...counts,
        askedBy: wish.askedBy,
        agreedBy: wish.agreedBy,
        outOfDate: marked.map(({ kind, subjectId }) => `${kind} ${subjectId}`),
      },
      reason: wish.reason,
    })
    return { ...counts, outOfDate: marked.length }
  })
}

function mayTurnDown(actor: Actor, wish: WishRow): boolean {
  return (
    wish.askedById === actor.personId ||
    may(actor, 'intake:agree-withdrawal') ||
    may(actor, 'intake:withdraw')
  )
}

async function importOr404(db: DbOrTx, importId: number): Promise<ImportRow> {
  const found = Number.isSafeInteger(importId) && importId > 0 ? await findImport(db, importId) : null
  if (found === null)
    throw new DomainError('not-found', 'There is no file with this number in the log intake.')
  return found
}

/** Locks the import, so that its wishes change one after the other, and makes sure that it is accepted. */
async function demandAccepted(inside: DbOrTx, importId: number): Promise<void> {
  const state = await lockImport(inside, importId)
  if (state === 'accepted') return
  const word = state === null ? 'gone' : IMPORT_STATE_LABELS[state]
  throw new DomainError(
    'conflict',
    `Import ${importId} is “${word}”; only one that is “${IMPORT_STATE_LABELS.accepted}” can be withdrawn. Nothing was changed.`,
  )
}

async function demandWish(inside: DbOrTx, importId: number, state?: 'asked' | 'agreed'): Promise<WishRow> {
  const wish = await findOpenWish(inside, importId)
  if (wish === null)
    throw new DomainError(
      'conflict',
      'Nobody is asking for this import to be withdrawn. Ask for it first, and say why.',
    )
  if (state === undefined || wish.state === state) return wish
  throw new DomainError(
    'conflict',
    wish.state === 'asked'
      ? 'No engineer has agreed to this withdrawal yet. Nothing was changed.'
      : `${wish.agreedBy ?? 'An engineer'} has agreed to this withdrawal already. An administrator can do it now.`,
  )
}

function note(
  inside: DbOrTx,
  actor: Actor,
  now: Date,
  importId: number,
  act: string,
  reason: string,
): Promise<void> {
  return writeRecord(inside, {
    at: now,
    actor,
    act,
    subjectKind: 'import',
    subjectId: String(importId),
    reason,
  })
}
