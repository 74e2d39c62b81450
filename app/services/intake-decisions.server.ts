/** What a person decides about a file that has been read: answers to its questions, taking it in, or discarding it. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import { isDuplicate } from '../db/errors.server.ts'
import {
  findImport,
  findSameBytes,
  findSource,
  type ImportRow,
  lockImport,
  lockSource,
  readOriginal,
  updateImport,
} from '../db/queries/imports.server.ts'
import { onOneConnection } from '../db/queries/imports-merge.server.ts'
import { importStretches } from '../db/queries/imports-withdraw.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { IMPORT_STATE_LABELS, type ImportState, LARGE_FILE_BYTES } from '../domain/imports.ts'
import { readNightFile } from '../domain/night-files/reader.ts'
import type { Answer, ReadOut } from '../domain/night-files/types.ts'
import { askToRead, heldAlready } from './intake.server.ts'
import {
  keepProfile,
  readingRules,
  signedAnswers,
  siteMinute,
  storedReport,
} from './intake-reading.server.ts'
import { OtherThanReported, storeReadings } from './intake-store.server.ts'
import { enqueue } from './jobs.server.ts'
import { writeRecord } from './record.server.ts'
import { markOutOfDate } from './revisions.server.ts'
import { getSite } from './site.server.ts'

export interface Accepted {
  importId: number
  stored: number
  held: number
  conflicting: number
}

/**
 * Takes a read file in: its readings become visible all at once, or not at all. Readings that are held already are
 * left alone; a different reading of the same channel and instant is kept beside the earlier one, and both are marked.
 *
 * @throws DomainError forbidden; not-found; conflict (taken in or discarded meanwhile, or the same bytes were);
 *   not-acceptable-now (refused, or questions are open)
 */
export async function acceptImport(db: Db, actor: Actor, now: Date, importId: number): Promise<Accepted> {
  demand(actor, 'intake:take-in')
  const seen = await importOr404(db, importId)
  try {
    return await acceptOnce(db, actor, now, seen, true)
  } catch (error) {
    if (error instanceof OtherThanReported) return await acceptOnce(db, actor, now, seen, false)
    // Two files with the same bytes, of two sources, at once: the unique key lets one through.
    if (!isDuplicate(error)) throw error
    const held = await findSameBytes(db, seen.sha256, ['accepted'])
    if (held === null) throw error
    throw heldAlready(held, (await getSite(db)).timeZone)
  }
}

/** @param mayGoStraight load straight into the stored readings where the report says that the file meets none */
function acceptOnce(
  db: Db,
  actor: Actor,
  now: Date,
  seen: ImportRow,
  mayGoStraight: boolean,
): Promise<Accepted> {
  const importId = seen.id
  return onOneConnection(db, ({ db: one, raw }) =>
    tx(one, async (inside) => {
      // Files of one source come in one after the other: two of them may hold the same instants.
      const source = await lockSource(inside, seen.sourceId)
      if (source === null)
        throw new DomainError('not-found', `The register has no source ${seen.sourceCode}.`)
      await demandWaiting(inside, importId)
      const found = await importOr404(inside, importId)
      const site = await getSite(inside)
      const held = await findSameBytes(inside, found.sha256, ['accepted'])
      if (held !== null) throw heldAlready(held, site.timeZone)
      const report = demandReadable(storedReport(found.readOut))
      const rules = await readingRules(inside, source, {
        uploadedAt: found.uploadedAt,
        fileName: found.fileName,
        statedBytes: null,
        answers: report.answers,
      })
      const { readOut, counts } = await storeReadings(
        { inside, raw },
        importId,
        report,
        rules,
        originalOf(db, found),
        mayGoStraight,
      )
      const learnt = await keepProfile(inside, actor, now, source, rules.profile, readOut)
      // Late data: what was computed for these stretches did not know of it.
      const marked = await markOutOfDate(inside, {
        stretches: await importStretches(inside, importId),
        now,
        reason: `Import ${importId} (${found.fileName}) brought readings for a time already computed.`,
      })
      await updateImport(inside, importId, {
        state: 'accepted',
        acceptedSha256: found.sha256,
        readOut,
        profileVersion: readOut.profileVersion,
        readingCount: counts.stored,
        heldCount: counts.held,
        conflictCount: counts.conflicting,
        decidedBy: actor.personId,
        decidedAt: now,
      })
      await enqueue(inside, { kind: 'roll-up', payload: {} })
      await writeRecord(inside, {
        at: now,
        actor,
        act: 'night file taken in',
        subjectKind: 'import',
        subjectId: String(importId),
        before: { state: 'read' },
        after: {
          state: 'accepted',
          fileName: found.fileName,
          source: found.sourceCode,
          ...counts,
          ...(learnt === null ? {} : { profileVersion: learnt }),
          outOfDate: marked.map(({ kind, subjectId }) => `${kind} ${subjectId}`),
        },
      })
      return { importId, ...counts }
    }),
  )
}

/**
 * Takes a file in now, or has the worker do it when the file is large: what stands in the way then is found on the
 * import's page.
 *
 * @returns null when the worker does it
 * @throws as acceptImport, for what is known already
 */
export async function acceptNowOrLater(
  db: Db,
  actor: Actor,
  now: Date,
  importId: number,
  largeBytes = LARGE_FILE_BYTES,
): Promise<Accepted | null> {
  demand(actor, 'intake:take-in')
  const seen = await importOr404(db, importId)
  if (seen.byteSize <= largeBytes) return acceptImport(db, actor, now, importId)
  await tx(db, async (inside) => {
    await demandWaiting(inside, importId)
    const found = await importOr404(inside, importId)
    demandReadable(storedReport(found.readOut))
    // With a fault beside it the worker has stumbled, and asking again does no harm.
    if (found.takingInBy !== null && found.fault === '')
      throw new DomainError('conflict', `Import ${importId} is being taken in already. Nothing was changed.`)
    await updateImport(inside, importId, { takingInBy: actor.personId, fault: '' })
    const { personId, name, roles } = actor
    await enqueue(inside, {
      kind: 'take-in-night-file',
      payload: { importId, actor: { personId, name, roles: [...roles] } },
    })
  })
  return null
}

/**
 * Discards a file that is not taken in. Bytes and report stay, the file is simply not wanted.
 *
 * @throws DomainError forbidden; not-found; conflict when somebody has decided about it meanwhile
 */
export async function discardImport(
  db: Db,
  actor: Actor,
  now: Date,
  importId: number,
  reason: string,
): Promise<void> {
  demand(actor, 'intake:take-in')
  await importOr404(db, importId)
  await tx(db, async (inside) => {
    await demandWaiting(inside, importId, ['read', 'reading'])
    await updateImport(inside, importId, {
      state: 'discarded',
      decidedBy: actor.personId,
      decidedAt: now,
      reason,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'night file discarded',
      subjectKind: 'import',
      subjectId: String(importId),
      before: { state: 'read' },
      after: { state: 'discarded' },
      reason,
    })
  })
}

/**
 * Reads a waiting file again with a person's answers to its questions, and stores the new report.
 *
 * @throws DomainError forbidden; not-found; conflict (decided meanwhile); bad-input (an answer that is no choice)
 */
export async function answerQuestions(
  db: Db,
  actor: Actor,
  now: Date,
  importId: number,
  answers: readonly Answer[],
  largeBytes = LARGE_FILE_BYTES,
): Promise<void> {
  demand(actor, 'intake:take-in')
  const found = await importOr404(db, importId)
  const before = storedReport(found.readOut)
  if (before === null)
    throw new DomainError('not-found', 'This import holds no file, so there is nothing to answer.')
  const given = signedAnswers(answers, before.questions, actor, now)
  const source = await findSource(db, found.sourceCode)
  if (source === null) throw new DomainError('not-found', `The register has no source ${found.sourceCode}.`)
  const all = [...before.answers.filter(({ id }) => !given.some((other) => other.id === id)), ...given]
  const rules = await readingRules(db, source, {
    uploadedAt: found.uploadedAt,
    fileName: found.fileName,
    statedBytes: null,
    answers: all,
    history: true,
  })
  // A large file takes the worker a while; its report stays as it was until then.
  const large = found.byteSize > largeBytes
  const readOut = large
    ? null
    : await readNightFile(originalOf(db, found), rules.profile, rules.context, () => {})
  await tx(db, async (inside) => {
    await demandWaiting(inside, importId)
    if (readOut === null) {
      await updateImport(inside, importId, { state: 'reading', bytesDone: 0, fault: '' })
      // A job's payload holds the answers alone; what was asked is found again in the report that stays until then.
      const bare = all.map(({ text: _text, found: _found, label: _label, ...answer }) => answer)
      await askToRead(inside, importId, bare)
    } else {
      await updateImport(inside, importId, {
        readOut,
        readingCount: readOut.readings.total,
        firstAt: readOut.firstMs === null ? null : new Date(readOut.firstMs),
        lastAt: readOut.lastMs === null ? null : new Date(readOut.lastMs),
      })
    }
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'questions of a night file answered',
      subjectKind: 'import',
      subjectId: String(importId),
      before: before.answers,
      after: all,
    })
  })
}

/** Bytes of a received file, as they came. */
function originalOf(db: Db, found: ImportRow): AsyncGenerator<Uint8Array> {
  return readOriginal(db, found.attachmentId)
}

async function importOr404(db: DbOrTx, importId: number): Promise<ImportRow> {
  const found = Number.isSafeInteger(importId) ? await findImport(db, importId) : null
  if (found === null)
    throw new DomainError('not-found', 'There is no file with this number in the log intake.')
  return found
}

/** Locks the import and makes sure that nobody has decided about it yet. */
async function demandWaiting(
  inside: DbOrTx,
  importId: number,
  states: readonly ImportState[] = ['read'],
): Promise<void> {
  const state = await lockImport(inside, importId)
  if (state !== null && states.includes(state)) return
  const found = await importOr404(inside, importId)
  const site = await getSite(inside)
  const when = found.decidedAt === null ? '' : ` on ${siteMinute(found.decidedAt, site.timeZone)}`
  const who = found.decidedBy === null ? '' : ` by ${found.decidedBy}${when}`
  throw new DomainError(
    'conflict',
    `Import ${importId} is “${IMPORT_STATE_LABELS[found.state]}”${who}. Nothing was changed.`,
    {
      details: { importId, state: found.state },
    },
  )
}

function demandReadable(readOut: ReadOut | null): ReadOut {
  if (readOut?.state === 'readable') return readOut
  const open = readOut?.questions.find(({ blocking }) => blocking)
  throw new DomainError(
    'not-acceptable-now',
    open === undefined
      ? 'The file could not be read, so there is nothing to take in.'
      : `One question is still open: ${open.text}`,
  )
}
