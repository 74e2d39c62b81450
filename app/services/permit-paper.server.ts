/** What the sheets of a permit are printed from, as the register has it at this moment. */
import { create as createQr } from 'qrcode'
import type { Db, DbOrTx } from '../db/client.server.ts'
import { listCompetences } from '../db/queries/competences.server.ts'
import { listPeople } from '../db/queries/people.server.ts'
import { listGateValves } from '../db/queries/permit-conflicts.server.ts'
import {
  findPermit,
  listPermitActs,
  numberOfShortCode,
  type PermitActRow,
  type PermitRow,
} from '../db/queries/permits.server.ts'
import { listSegments } from '../db/queries/segments.server.ts'
import type { Actor } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { instantText } from '../domain/instant-text.ts'
import type { Paper } from '../domain/paper/blocks.ts'
import { modulesDrawing } from '../domain/paper/drawing.ts'
import type { SketchFacts } from '../domain/paper/sketch.ts'
import { stateAsOf } from '../domain/permit-clock.ts'
import { type PaperFacts, permitPaper } from '../domain/permit-sheets.ts'
import { figureText } from '../domain/permit-tests.ts'
import { readClock } from './clock.server.ts'
import { readHeating } from './heating.server.ts'
import { readConflicts } from './permit-conflicts.server.ts'
import { readHazards } from './permit-hazards.server.ts'
import { readPaperCurve } from './permit-paper-curve.server.ts'
import { readPaperPoints } from './permit-paper-points.server.ts'
import { permitPdf } from './permit-pdf.server.ts'
import { readTestTable, type TestLine } from './permit-tests.server.ts'
import { getSite } from './site.server.ts'

/** Side of the printed QR code, points; about 25 mm. */
const QR_SIDE = 70

/**
 * The sheets of a permit as they would be printed now.
 *
 * @param origin address of the site that the short code is reached under, such as https://ebbline.qfl.example
 * @throws DomainError not-found
 */
export async function readPermitPaper(
  db: Db,
  actor: Actor,
  now: Date,
  number: string,
  origin: string,
): Promise<Paper> {
  const permit = await findPermit(db, number)
  if (permit === null) throw new DomainError('not-found', `There is no permit ${number}.`)
  return permitPaper(await paperFacts(db, actor, now, permit, origin))
}

/** The same sheets as a PDF file. @throws DomainError not-found */
export async function readPermitPdf(
  db: Db,
  actor: Actor,
  now: Date,
  number: string,
  origin: string,
): Promise<Buffer> {
  return permitPdf(await readPermitPaper(db, actor, now, number, origin), now)
}

/** The permit that a printed short code belongs to. @throws DomainError not-found */
export async function permitOfCode(db: DbOrTx, code: string): Promise<string> {
  const number = await numberOfShortCode(db, code)
  if (number !== null) return number
  throw new DomainError(
    'not-found',
    `No permit has the short code “${code}”. Codes are printed beside the QR code of each sheet; read it again.`,
  )
}

/** Address that a QR code and a typed short code lead to. */
function addressOf(origin: string, code: string): string {
  return `${origin.replace(/\/+$/, '')}/p/${code}`
}

async function paperFacts(
  db: Db,
  actor: Actor,
  now: Date,
  permit: PermitRow,
  origin: string,
): Promise<PaperFacts> {
  const [site, clock, acts, people, tests, hazards, conflicts, heating, points] = await Promise.all([
    getSite(db),
    readClock(db),
    listPermitActs(db, permit.id),
    listPeople(db),
    readTestTable(db, permit, now),
    readHazards(db, permit, now),
    readConflicts(db, permit, now),
    readHeating(db, permit.content.segments, now),
    readPaperPoints(db, permit),
  ])
  const names = new Map(people.map(({ id, name }) => [id, name]))
  const nameOf = (id: number | null) => (id === null ? null : (names.get(id) ?? `person ${id}`))
  const { content, number, shortCode } = permit
  const address = addressOf(origin, shortCode)
  const { state } = stateAsOf(permit, now)
  return {
    site: { name: site.name, zone: site.timeZone, demo: clock.demo },
    number,
    code: shortCode,
    address,
    qr: modulesDrawing(qrModules(address), QR_SIDE),
    printed: { at: now, by: actor.name },
    state,
    revision: permit.revision,
    version: permit.version,
    approvedVersion: permit.approvedVersion,
    content,
    windowFrom: permit.windowFrom,
    windowTo: permit.windowTo,
    currentUntil: permit.currentUntil,
    people: {
      ...signersOf(permit, acts),
      holder: permit.holderName ?? nameOf(content.holderId),
      deputies: content.deputyIds.map((id) => nameOf(id) ?? ''),
      crew: content.crewIds.map((id) => nameOf(id) ?? ''),
      isolating: nameOf(content.isolatingPersonId),
      electrician: await withLicence(db, content.electricianId, nameOf, site.timeZone),
      attendant: nameOf(content.attendantId),
    },
    terms:
      permit.approvedBy === null
        ? ''
        : textOf(
            acts.findLast(({ act }) => act === 'approve'),
            'terms',
          ),
    stopped: state === 'suspended' ? stopOf(acts, site.timeZone) : null,
    points,
    tests: tests.map((line) => paperTest(line)),
    hazards,
    conflicts,
    heatingText: heating.text,
    sketch: await readSketch(db, permit, now),
    curve: await readPaperCurve(db, permit, now, site),
  }
}

/** Dark and light modules of a QR code with enough to spare for a sheet in a plastic sleeve. */
function qrModules(text: string): boolean[][] {
  const { modules } = createQr(text, { errorCorrectionLevel: 'M' })
  return Array.from({ length: modules.size }, (_, y) =>
    Array.from({ length: modules.size }, (_, x) => modules.get(y, x) !== 0),
  )
}

/** Who approved and who accepted, as far as that still holds. */
function signersOf(permit: PermitRow, acts: readonly PermitActRow[]) {
  const approved = permit.approvedBy !== null
  const accepted = approved
    ? acts.findLast(({ act, at }) => act === 'accept' && at >= (permit.approvedAt ?? at))
    : undefined
  return {
    requestedBy: permit.requestedByName,
    approvedBy: permit.approvedByName,
    approvedAt: permit.approvedAt,
    acceptedBy: accepted?.personName ?? null,
    acceptedAt: accepted?.at ?? null,
  }
}

function textOf(act: PermitActRow | undefined, name: string): string {
  const detail = act?.detail
  if (typeof detail !== 'object' || detail === null) return ''
  const found = (detail as Record<string, unknown>)[name]
  return typeof found === 'string' ? found : ''
}

function stopOf(acts: readonly PermitActRow[], zone: string): PaperFacts['stopped'] {
  const stop = acts.findLast(({ act }) => act === 'suspend' || act === 'return-to-holder')
  if (stop === undefined) return null
  const safe = acts.findLast(({ act, revision }) => act === 'made-safe' && revision > stop.revision)
  return {
    at: stop.at,
    by: stop.personName ?? 'Ebbline',
    reason: stop.reason,
    madeSafe:
      safe === undefined
        ? null
        : `${textOf(safe, 'how')} (${textOf(safe, 'who')}, ${instantText(new Date(textOf(safe, 'at')), zone)})`,
  }
}

async function withLicence(
  db: DbOrTx,
  personId: number | null,
  nameOf: (id: number | null) => string | null,
  zone: string,
): Promise<string | null> {
  const name = nameOf(personId)
  if (personId === null || name === null) return null
  const licences = await listCompetences(db, { personIds: [personId], kind: 'electrician-licence' })
  const last = licences.at(-1)
  if (last === undefined) return `${name}, no licence entered`
  const end = last.endsAt === null ? '' : ` valid before ${instantText(last.endsAt, zone)}`
  return `${name}, licence ${last.number}${end}`
}

function paperTest({
  kind,
  place,
  limits,
  everyHours,
  last,
  state,
  nextDueAt,
}: TestLine): PaperFacts['tests'][number] {
  const wanted = [limits, everyHours === null ? 'once' : `every ${everyHours} h`].filter(
    (text) => text !== '',
  )
  return {
    kind,
    place,
    wanted: wanted.join('\n'),
    last:
      last === null
        ? null
        : {
            result: last.value === null ? '' : figureText(last.value, last.unit),
            passed: state !== 'failed',
            instrument: last.instrumentSerial,
            calibrationDue: last.calibrationDue,
            by:
              last.witnessName === null
                ? last.testerName
                : `${last.testerName}, witnessed by ${last.witnessName}`,
            at: last.takenAt,
            nextDueAt,
          },
    overdue: state === 'overdue',
  }
}

/** Null for a permit whose stretch is not said, or lies on a line that the register does not know. */
async function readSketch(db: DbOrTx, { content }: PermitRow, now: Date): Promise<SketchFacts | null> {
  const { fromM, toM, exclusionWestM, exclusionEastM, segments } = content
  if (fromM === null || toM === null || toM <= fromM) return null
  const all = await listSegments(db, now)
  const line = all.find(({ tag }) => segments.includes(tag))?.lineCode
  if (line === undefined) return null
  const gates = await listGateValves(db)
  return {
    fromM,
    toM,
    exclusionWestM: exclusionWestM ?? 0,
    exclusionEastM: exclusionEastM ?? 0,
    segments: all
      .filter(({ lineCode }) => lineCode === line)
      .map(({ tag, startM, endM }) => ({ tag, startM, endM })),
    gates: gates.filter((gate) => gate.line === line).map(({ tag, atM }) => ({ tag, atM })),
  }
}
