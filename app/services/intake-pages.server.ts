/** What the pages of the log intake show. */
import Papa from 'papaparse'
import type { Db } from '../db/client.server.ts'
import {
  type ChannelTarget,
  countHeld,
  findImport,
  type ImportListRow,
  type ImportRow,
  listChannelTargets,
  listImports,
  listImportsSince,
  listQuestioned,
  listSources,
  listSourcesHeardOf,
  readOriginal,
} from '../db/queries/imports.server.ts'
import { findOpenWish, listOpenWishes } from '../db/queries/imports-wishes.server.ts'
import { type Actor, demand, may } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { expectedNight } from '../domain/expected-files.ts'
import { LARGE_FILE_BYTES, type WithdrawalState } from '../domain/imports.ts'
import { copyText } from '../domain/night-files/rounded-copy.ts'
import type { ReadOut } from '../domain/night-files/types.ts'
import { findRoundedCopy } from './intake-copy.server.ts'
import { type EarlierFile, findEarlierFile } from './intake-earlier.server.ts'
import { storedReport } from './intake-reading.server.ts'
import { getSite } from './site.server.ts'

const NIGHTS = 3
const DAY_MS = 86_400_000
const LISTED = 40

export interface NightRow {
  sourceCode: string
  sourceName: string
  /** Day on which the night began, YYYY-MM-DD. */
  night: string
  dueAt: Date
  /**
   * `refused`: something came that is no log, such as the sign-in page of the logger, which is as good as nothing;
   * `silent`: no file of this source has ever come.
   */
  state: 'taken-in' | 'waiting' | 'reading' | 'refused' | 'expected' | 'missing' | 'silent'
  /** The file that was taken in, waits, is being read, or was refused. */
  file: { importId: number; fileName: string; by: string; at: Date } | null
}

export interface IntakePageData {
  sources: { code: string; name: string }[]
  nights: NightRow[]
  /** With how far a withdrawal is that somebody asked for, and whether a question has to be answered first. */
  files: (ImportListRow & { wish: WithdrawalState | null; hasQuestion: boolean })[]
  mayTakeIn: boolean
}

/** The nights that are due, what came for them, and the last files. */
export async function readIntakePage(db: Db, actor: Actor, now: Date): Promise<IntakePageData> {
  demand(actor, 'facility:view')
  const since = new Date(now.getTime() - (NIGHTS + 2) * DAY_MS)
  const [site, sources, recent, files, heardOf, wishes, questioned] = await Promise.all([
    getSite(db),
    listSources(db),
    listImportsSince(db, since),
    listImports(db, LISTED),
    listSourcesHeardOf(db),
    listOpenWishes(db),
    listQuestioned(db),
  ])
  const nights: NightRow[] = []
  for (let back = 0; back < NIGHTS; back += 1) {
    for (const source of sources) {
      if (source.dueAt === '') continue
      const night = nightOf(source, recent, new Date(now.getTime() - back * DAY_MS), back, site.timeZone)
      nights.push(heardOf.has(source.id) ? night : { ...night, state: 'silent' })
    }
  }
  return {
    sources: sources.map(({ code, name }) => ({ code, name })),
    nights,
    files: files.map((file) => ({
      ...file,
      wish: wishes.get(file.id) ?? null,
      hasQuestion: questioned.has(file.id),
    })),
    mayTakeIn: may(actor, 'intake:take-in'),
  }
}

function nightOf(
  source: { id: number; code: string; name: string; dueAt: string },
  recent: readonly ImportListRow[],
  at: Date,
  back: number,
  zone: string,
): NightRow {
  const own = recent.filter(({ sourceId }) => sourceId === source.id)
  const bare = expectedNight({ code: source.code, dueAt: source.dueAt, endAt: null, now: at, zone })
  // The file of this night ends before it is due; a later file says nothing about this night.
  const ofNight = (states: readonly string[]) =>
    own
      .filter(({ state, lastAt }) => states.includes(state) && lastAt !== null && lastAt <= bare.dueAt)
      .find(
        ({ lastAt }) =>
          expectedNight({ code: source.code, dueAt: source.dueAt, endAt: lastAt, now: at, zone }).state ===
          'taken-in',
      )
  // Nothing is known of when these begin or end: they count for the night that was over last when they came.
  const cameAfter = (states: readonly string[]) =>
    own.find(
      ({ state, uploadedAt }) =>
        states.includes(state) &&
        uploadedAt >= bare.endsAt &&
        uploadedAt.getTime() < bare.endsAt.getTime() + DAY_MS,
    )
  const overdue = back > 0 || bare.state === 'missing'
  const candidates: [NightRow['state'], ImportListRow | undefined][] = [
    ['taken-in', ofNight(['accepted'])],
    ['waiting', ofNight(['read'])],
    ['reading', cameAfter(['reading'])],
    ['refused', cameAfter(['refused'])],
  ]
  const [state, file] = candidates.find(([, found]) => found !== undefined) ?? [
    overdue ? ('missing' as const) : ('expected' as const),
    undefined,
  ]
  return {
    sourceCode: source.code,
    sourceName: source.name,
    night: bare.night,
    dueAt: bare.dueAt,
    state,
    file:
      file === undefined
        ? null
        : {
            importId: file.id,
            fileName: file.fileName,
            by: state === 'taken-in' ? (file.decidedBy ?? '') : file.uploadedBy,
            at: file.decidedAt ?? file.uploadedAt,
          },
  }
}

export interface ImportPageData {
  file: Omit<ImportRow, 'readOut'>
  /** Null for an import that came without a file (typed readings). */
  readOut: ReadOut | null
  targets: ChannelTarget[]
  /** Readings of this source that are stored already for the stretch of the file. */
  heldBefore: number
  mayTakeIn: boolean
  /** Whether somebody wants it withdrawn, and how far that is. */
  wish: 'asked' | 'agreed' | null
  /** What to say when the file holds only what is stored already, with fewer digits; null for any other. */
  copy: string | null
  /** Another file of the same name, while this one has not been decided about. */
  earlier: EarlierFile | null
}

/**
 * One file with its report.
 *
 * @throws DomainError forbidden, not-found
 */
export async function readImportPage(db: Db, actor: Actor, importId: number): Promise<ImportPageData> {
  demand(actor, 'facility:view')
  const found = await importOf(db, importId)
  const { readOut: value, ...file } = found
  const readOut = storedReport(value)
  const waits = file.state === 'read' && file.firstAt !== null && file.lastAt !== null
  // A large file would have to be read whole for one page.
  const undecided = file.state === 'read' || file.state === 'refused'
  const mayBeCopy = undecided && file.byteSize <= LARGE_FILE_BYTES
  const [targets, heldBefore, wish, copy, earlier] = await Promise.all([
    listChannelTargets(db, file.sourceId, file.lastAt ?? file.uploadedAt),
    waits && file.firstAt !== null && file.lastAt !== null
      ? countHeld(db, file.sourceId, file.firstAt, file.lastAt)
      : Promise.resolve(0),
    findOpenWish(db, importId),
    mayBeCopy ? findRoundedCopy(db, importId) : Promise.resolve(null),
    undecided ? findEarlierFile(db, found) : Promise.resolve(null),
  ])
  return {
    file,
    readOut,
    targets,
    heldBefore,
    mayTakeIn: may(actor, 'intake:take-in'),
    wish: wish?.state === 'asked' || wish?.state === 'agreed' ? wish.state : null,
    copy: copy === null ? null : copyText(copy),
    earlier,
  }
}

async function importOf(db: Db, importId: number): Promise<ImportRow> {
  const found = Number.isSafeInteger(importId) && importId > 0 ? await findImport(db, importId) : null
  if (found === null)
    throw new DomainError('not-found', 'There is no file with this number in the log intake.')
  return found
}

/**
 * The bytes of a file as they came.
 *
 * @throws DomainError forbidden, not-found
 */
export async function originalFile(
  db: Db,
  actor: Actor,
  importId: number,
): Promise<{ fileName: string; byteSize: number; body: ReadableStream<Uint8Array> }> {
  demand(actor, 'facility:view')
  const { fileName, byteSize, attachmentId } = await importOf(db, importId)
  if (attachmentId === null)
    throw new DomainError('not-found', 'This import came without a file: its readings were typed.')
  const pieces = readOriginal(db, attachmentId)
  const body = new ReadableStream<Uint8Array>({
    async pull(controller) {
      const { value, done } = await pieces.next()
      if (done === true) controller.close()
      else controller.enqueue(value)
    },
    async cancel() {
      await pieces.return(undefined)
    },
  })
  return { fileName, byteSize, body }
}

/**
 * The lines of a file that were turned away, as CSV: where, what was found, what was expected, how to mend it.
 *
 * @throws DomainError forbidden, not-found
 */
export async function rejectedLinesCsv(
  db: Db,
  actor: Actor,
  importId: number,
): Promise<{ fileName: string; text: string }> {
  demand(actor, 'facility:view')
  const found = await importOf(db, importId)
  const readOut = storedReport(found.readOut)
  const text = Papa.unparse(
    {
      fields: ['line', 'field', 'reason', 'found', 'expected', 'mend', 'text'],
      data: (readOut?.rejected ?? []).map((one) => [
        one.line,
        one.column ?? '',
        one.code,
        one.found,
        one.expected,
        one.mend,
        one.text,
      ]),
    },
    // A cell that begins like a formula must stay text in a spreadsheet.
    { newline: '\r\n', escapeFormulae: true },
  )
  return { fileName: found.fileName, text: `${text}\r\n` }
}
