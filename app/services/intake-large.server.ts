/**
 * Large files, which the worker reads and takes in. Either may be broken off at any point and begun again: reading
 * stores nothing but the report at its end, and taking in is one transaction.
 */
import type { Db } from '../db/client.server.ts'
import {
  findImport,
  findSource,
  type ImportRow,
  lockImport,
  readOriginal,
  updateImport,
} from '../db/queries/imports.server.ts'
import { tx } from '../db/transaction.server.ts'
import type { Actor } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { createNightFileReader } from '../domain/night-files/reader.ts'
import type { Answer, ReadOut } from '../domain/night-files/types.ts'
import { reportColumns } from './intake.server.ts'
import { acceptImport } from './intake-decisions.server.ts'
import { readingRules, storedReport } from './intake-reading.server.ts'
import { writeRecord } from './record.server.ts'

/** How often the page can see that the worker is further. */
const NOTE_EVERY_MS = 1_000

const AGAIN =
  'The worker could not read the whole file and tries again by itself. If this stays, discard the file and tell your administrator.'

const TAKE_IN_AGAIN =
  'The worker could not take the file in and tries again by itself. Nothing of it is stored yet. If this stays, tell your administrator.'

/**
 * Reads a kept file and stores its report, unless somebody has decided about it meanwhile.
 *
 * @returns whether a report was stored
 * @throws Error when told to stop, or when the file cannot be read for a reason of ours; to be tried again then
 */
export async function readLargeFile(
  db: Db,
  work: { importId: number; answers: readonly Answer[] },
  now: Date,
  signal: AbortSignal,
): Promise<boolean> {
  const found = await findImport(db, work.importId)
  if (found?.state !== 'reading') return false
  let readOut: ReadOut
  try {
    readOut = await readKept(db, found, work.answers, signal)
  } catch (error) {
    if (!signal.aborted) await updateImport(db, found.id, { fault: AGAIN })
    throw error
  }
  return tx(db, async (inside) => {
    if ((await lockImport(inside, found.id)) !== 'reading') return false
    await updateImport(inside, found.id, { ...reportColumns(readOut), bytesDone: found.byteSize, fault: '' })
    await writeRecord(inside, {
      at: now,
      actor: null,
      act: readOut.state === 'refused' ? 'night file refused' : 'night file read',
      subjectKind: 'import',
      subjectId: String(found.id),
      after: { lines: readOut.lines.total, refusal: readOut.refusal?.code ?? null },
    })
    return true
  })
}

async function readKept(
  db: Db,
  found: ImportRow,
  answers: readonly Answer[],
  signal: AbortSignal,
): Promise<ReadOut> {
  const source = await findSource(db, found.sourceCode)
  if (source === null) throw new DomainError('not-found', `The register has no source ${found.sourceCode}.`)
  const rules = await readingRules(db, source, {
    uploadedAt: found.uploadedAt,
    fileName: found.fileName,
    statedBytes: null,
    answers: withQuestions(answers, storedReport(found.readOut)),
    history: true,
  })
  // Batches are let go as they come: readings are stored when the file is taken in, from its bytes.
  const reader = createNightFileReader(rules.profile, rules.context, () => {})
  let noted = performance.now()
  for await (const piece of readOriginal(db, found.attachmentId)) {
    signal.throwIfAborted()
    reader.push(piece)
    if (performance.now() - noted < NOTE_EVERY_MS) continue
    noted = performance.now()
    await updateImport(db, found.id, { bytesDone: reader.bytesSeen })
  }
  if (reader.bytesSeen !== found.byteSize)
    throw new Error(`Import ${found.id}: ${reader.bytesSeen} bytes are kept of ${found.byteSize}`)
  return reader.end()
}

/** Answers with what was asked, which the report before them still says. */
function withQuestions(answers: readonly Answer[], before: ReadOut | null): Answer[] {
  return answers.map((answer) => {
    const known = before?.answers.find(({ id, choice }) => id === answer.id && choice === answer.choice)
    if (known !== undefined) return known
    const asked = before?.questions.find(({ id }) => id === answer.id)
    if (asked === undefined) return answer
    const label = asked.choices.find(({ value }) => value === answer.choice)?.label
    return { ...answer, text: asked.text, found: asked.found, ...(label === undefined ? {} : { label }) }
  })
}

/**
 * Takes a large file in on behalf of the person who asked for it, with the roles they had then. What stands in the way
 * is kept with the import for that person to read.
 */
export async function takeInLargeFile(db: Db, importId: number, actor: Actor, now: Date): Promise<void> {
  try {
    await acceptImport(db, actor, now, importId)
    await updateImport(db, importId, { takingInBy: null, fault: '' })
  } catch (error) {
    if (!(error instanceof DomainError)) {
      await updateImport(db, importId, { fault: TAKE_IN_AGAIN })
      throw error
    }
    await updateImport(db, importId, { takingInBy: null, fault: error.message })
  }
}
