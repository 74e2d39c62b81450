/**
 * Deleting records of ended permits. Never by a button alone: an administrator asks, with a list of what would go; an
 * officer or engineer who is somebody else agrees; each permit then goes in a transaction of its own, if it still is
 * what the list says. The manifest, the record and the signatures stay.
 */
import { createHash } from 'node:crypto'
import type { Db, DbOrTx } from '../db/client.server.ts'
import { findPermit, lockPermit } from '../db/queries/permits.server.ts'
import {
  deletePermit,
  findRun,
  insertRun,
  listAgreedRuns,
  listDeletable,
  listHeld,
  listRuns,
  lockOpenRuns,
  lockRun,
  noteRun,
  type RetentionRunRow,
  readWholePermit,
  setHeld,
  underRun,
  updateRun,
  type WholePermit,
} from '../db/queries/retention.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { ENDED_PERMIT_STATES } from '../domain/permit-words.ts'
import { deletableBefore, type Manifest, type ManifestEntry, ManifestSchema } from '../domain/retention.ts'
import type { HoldForm, RunDecision } from '../domain/schemas/permit-policy.ts'
import { readPermitPolicy } from './permit-policy.server.ts'
import { writeRecord } from './record.server.ts'
import { signAct, useSignedAct } from './signature.server.ts'

const SHOWN = 20
const ASK = { meaning: 'ask for old permits to be deleted', subjectKind: 'retention-run', subjectId: 'new' }

export type RetentionRun = Omit<RetentionRunRow, 'manifest'> & { manifest: Manifest }

function withManifest(row: RetentionRunRow): RetentionRun {
  return { ...row, manifest: ManifestSchema.parse(row.manifest) }
}

export interface RetentionView {
  runs: RetentionRun[]
  held: Awaited<ReturnType<typeof listHeld>>
  /** Numbers that a run asked for now would list. */
  deletable: string[]
  before: Date
}

/** Runs so far, permits held back, and what a run would list now. @throws DomainError forbidden */
export async function readRetention(db: Db, actor: Actor, now: Date): Promise<RetentionView> {
  demand(actor, 'facility:view')
  const { keepDays } = await readPermitPolicy(db)
  const before = deletableBefore(keepDays, now)
  const [runs, held, deletable] = await Promise.all([
    listRuns(db, SHOWN),
    listHeld(db),
    listDeletable(db, before, ENDED_PERMIT_STATES),
  ])
  return { runs: runs.map(withManifest), held, deletable, before }
}

/** The manifest of a run, for download. @throws DomainError forbidden, not-found */
export async function readManifest(db: Db, actor: Actor, id: number): Promise<RetentionRun> {
  demand(actor, 'facility:view')
  return existing(db, id)
}

/**
 * What is on the list and still there, whole, for keeping elsewhere before it goes. Its hashes are those of the
 * manifest.
 *
 * @throws DomainError forbidden, not-found
 */
export async function exportRun(
  db: Db,
  actor: Actor,
  id: number,
): Promise<{ number: string; content: string }[]> {
  demand(actor, 'facility:view')
  const { manifest } = await existing(db, id)
  const found = await Promise.all(manifest.permits.map(({ number }) => exportPermit(db, number)))
  return found
    .filter((whole) => whole !== null)
    .map(({ whole, content }) => ({ number: whole.permit.number, content }))
}

async function existing(db: DbOrTx, id: number): Promise<RetentionRun> {
  const run = Number.isSafeInteger(id) && id > 0 ? await findRun(db, id) : null
  if (run === null) throw new DomainError('not-found', 'There is no such run.')
  return withManifest(run)
}

/** A permit as text that always comes out the same, with its hash; null where it is gone. */
async function exportPermit(
  db: DbOrTx,
  number: string,
): Promise<{ whole: WholePermit; content: string; sha256: string } | null> {
  const permit = await findPermit(db, number)
  const whole = permit === null ? null : await readWholePermit(db, permit.id)
  if (whole === null) return null
  const content = JSON.stringify(whole)
  return { whole, content, sha256: createHash('sha256').update(content).digest('hex') }
}

function entryOf({ whole, sha256 }: { whole: WholePermit; sha256: string }): ManifestEntry {
  const { permit, segments, ...rows } = whole
  return {
    number: permit.number,
    state: permit.state,
    segments,
    windowFrom: permit.windowFrom?.toISOString() ?? null,
    windowTo: permit.windowTo?.toISOString() ?? null,
    endedAt: permit.endedAt?.toISOString() ?? null,
    counts: Object.fromEntries(Object.entries(rows).map(([name, list]) => [name, list.length])),
    sha256,
    deletedAt: null,
    left: '',
  }
}

/**
 * Asks for a run, signed. Nothing is deleted yet.
 *
 * @returns its id
 * @throws DomainError forbidden, conflict (one waits already), not-acceptable-now (nothing is old enough),
 *   signature-refused
 */
export async function askRetention(db: Db, actor: Actor, now: Date, password: string): Promise<number> {
  demand(actor, 'retention:ask')
  const signed = await signAct(db, { actor, password, now, ...ASK })
  return tx(db, async (inside) => {
    if ((await lockOpenRuns(inside)).length > 0) {
      throw new DomainError(
        'conflict',
        'A run waits already. It is agreed to or called off before another is asked for.',
      )
    }
    const policy = await readPermitPolicy(inside)
    const before = deletableBefore(policy.keepDays, now)
    const numbers = await listDeletable(inside, before, ENDED_PERMIT_STATES)
    if (numbers.length === 0) {
      throw new DomainError(
        'not-acceptable-now',
        `No ended permit is older than ${policy.keepDays} days and free to go. Nothing has been asked for.`,
      )
    }
    const permits: ManifestEntry[] = []
    for (const number of numbers) {
      const exported = await exportPermit(inside, number)
      if (exported !== null) permits.push(entryOf(exported))
    }
    const act = await useSignedAct(inside, signed, { actor, now, ...ASK })
    const manifest: Manifest = { before: before.toISOString(), policy, permits }
    const id = await insertRun(inside, {
      askedBy: actor.personId,
      askedAt: now,
      policy,
      manifest,
      askSignedActId: act.id,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'deletion of old permits asked for',
      subjectKind: ASK.subjectKind,
      subjectId: String(id),
      after: { before: manifest.before, permits: numbers },
      signedActId: act.id,
    })
    return id
  })
}

/**
 * Agrees to a run and carries it out, or calls it off. Agreeing is for somebody else than who asked, signed.
 *
 * @returns one sentence about what has been done
 * @throws DomainError forbidden, not-found, conflict, signature-refused
 */
export async function decideRetention(db: Db, actor: Actor, now: Date, form: RunDecision): Promise<string> {
  const run = await existing(db, form.runId)
  if (form.intent === 'call-off') {
    demandEither(actor)
    await tx(db, async (inside) => {
      await changeOpenRun(inside, run, form.revision, { calledOffAt: now })
      await writeRecord(inside, {
        at: now,
        actor,
        act: 'deletion of old permits called off',
        subjectKind: ASK.subjectKind,
        subjectId: String(run.id),
      })
    })
    return 'Called off. Nothing has been deleted.'
  }
  demand(actor, 'retention:agree')
  if (run.askedBy === actor.personId) {
    throw new DomainError(
      'forbidden',
      'You asked for this run yourself. Somebody else agrees to it, whatever roles you hold.',
    )
  }
  const subject = {
    meaning: 'agree to old permits being deleted',
    subjectKind: ASK.subjectKind,
    subjectId: String(run.id),
  }
  const signed = await signAct(db, { actor, password: form.password, now, ...subject })
  await tx(db, async (inside) => {
    const act = await useSignedAct(inside, signed, { actor, now, ...subject })
    await changeOpenRun(inside, run, form.revision, {
      agreedBy: actor.personId,
      agreedAt: now,
      agreeSignedActId: act.id,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'deletion of old permits agreed to',
      subjectKind: ASK.subjectKind,
      subjectId: String(run.id),
      after: { permits: run.manifest.permits.map(({ number, sha256 }) => ({ number, sha256 })) },
      signedActId: act.id,
    })
  })
  const { deleted, left } = await carryOutRetention(db, run.id, now)
  return `${deleted} deleted${left === 0 ? '' : `, ${left} left where they are (the manifest says why)`}.`
}

function demandEither(actor: Actor): void {
  try {
    demand(actor, 'retention:ask')
  } catch {
    demand(actor, 'retention:agree')
  }
}

async function changeOpenRun(
  inside: DbOrTx,
  run: RetentionRun,
  revision: number,
  change: Parameters<typeof updateRun>[2],
): Promise<void> {
  const open = run.agreedAt === null && run.calledOffAt === null
  if (!open || !(await updateRun(inside, { id: run.id, revision }, change))) {
    throw new DomainError('conflict', 'Somebody has decided on this run meanwhile. Look at it again.')
  }
}

/**
 * Deletes what an agreed run lists, each permit in a transaction of its own. Broken off, it goes on where it was when
 * it is called again.
 */
export async function carryOutRetention(
  db: Db,
  runId: number,
  now: Date,
): Promise<{ deleted: number; left: number }> {
  for (;;) {
    const permits = await tx(db, async (inside) => {
      const run = await lockRun(inside, runId)
      if (run === null || run.agreedAt === null || run.calledOffAt !== null) return []
      const manifest = ManifestSchema.parse(run.manifest)
      const next = manifest.permits.find(({ deletedAt, left }) => deletedAt === null && left === '')
      if (run.doneAt !== null || next === undefined) {
        if (run.doneAt === null) await noteRun(inside, runId, { doneAt: now })
        return manifest.permits
      }
      const left = await deleteOne(inside, runId, next, manifest.before)
      const done = { ...next, left, deletedAt: left === '' ? now.toISOString() : null }
      await noteRun(inside, runId, {
        manifest: { ...manifest, permits: manifest.permits.map((entry) => (entry === next ? done : entry)) },
      })
      await writeRecord(inside, {
        at: now,
        actor: null,
        act: left === '' ? 'permit deleted by policy' : 'permit left by a deletion',
        subjectKind: 'permit',
        subjectId: next.number,
        before: { ...next },
        reason: left === '' ? `Run ${runId}` : left,
      })
      return null
    })
    if (permits === null) continue
    return {
      deleted: permits.filter(({ deletedAt }) => deletedAt !== null).length,
      left: permits.filter(({ left }) => left !== '').length,
    }
  }
}

/** @returns why it stays; empty when it is gone */
async function deleteOne(
  inside: DbOrTx,
  runId: number,
  entry: ManifestEntry,
  before: string,
): Promise<string> {
  const permit = await lockPermit(inside, entry.number)
  if (permit === null) return 'It is not there any more.'
  if (permit.held) return `It is held: ${permit.heldReason}`
  const still = await listDeletable(inside, new Date(before), ENDED_PERMIT_STATES, [entry.number])
  if (still.length === 0) return 'It is not free to go any more: a lock hangs or an event stands open.'
  const exported = await exportPermit(inside, entry.number)
  if (exported?.sha256 !== entry.sha256) return 'It has changed since the list was made.'
  await underRun(inside, runId, () => deletePermit(inside, permit.id, entry.number))
  return ''
}

/** Goes on with runs that were broken off. @returns how many */
export async function finishRetentions(db: Db, now: Date): Promise<number> {
  const open = await listAgreedRuns(db)
  for (const id of open) await carryOutRetention(db, id, now)
  return open.length
}

/**
 * An officer holds a permit back from deletion, or releases it, signed.
 *
 * @throws DomainError forbidden, not-found, conflict (it is so already), signature-refused
 */
export async function holdPermit(db: Db, actor: Actor, now: Date, form: HoldForm): Promise<void> {
  demand(actor, 'permit:approve')
  if ((await findPermit(db, form.number)) === null) {
    throw new DomainError('not-found', `There is no permit ${form.number}.`, {
      fields: { number: [`There is no permit ${form.number}. Numbers look like HSP-2026-031.`] },
    })
  }
  const held = form.intent === 'hold'
  const subject = {
    meaning: held ? 'hold a permit back from deletion' : 'release a held permit for deletion',
    subjectKind: 'permit',
    subjectId: form.number,
  }
  const signed = await signAct(db, { actor, password: form.password, now, ...subject })
  await tx(db, async (inside) => {
    const act = await useSignedAct(inside, signed, { actor, now, ...subject })
    if (!(await setHeld(inside, form.number, { held, reason: held ? form.reason : '' }))) {
      throw new DomainError('conflict', `${form.number} is ${held ? 'held already' : 'not held'}.`)
    }
    await writeRecord(inside, {
      at: now,
      actor,
      act: held ? 'permit held' : 'held permit released',
      subjectKind: subject.subjectKind,
      subjectId: subject.subjectId,
      after: { held },
      reason: form.reason,
      signedActId: act.id,
    })
  })
}
