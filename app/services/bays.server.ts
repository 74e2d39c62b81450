/** The page of closed bays: what is closed, the readings since, the reading that somebody types, and the release. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  type BayClosureRow,
  findClosure,
  findMeter,
  listOpenClosures,
  listReleasedClosures,
  lockOpenEventsAt,
  releaseClosure,
} from '../db/queries/bay-closures.server.ts'
import { findSegments } from '../db/queries/heating.server.ts'
import { endSafetyEvent, lockSegment } from '../db/queries/safety-events.server.ts'
import { listSegments } from '../db/queries/segments.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { type OxygenLimits, type OxygenReading, type ReleaseRun, releaseRun } from '../domain/oxygen.ts'
import { WHAT_TO_DO } from '../domain/safety-events.ts'
import { type BayReleaseForm, type OxygenReadingForm, ReadOxygenSchema } from '../domain/schemas/bay.ts'
import { OXYGEN_SUBJECT, readOxygenLimits, reportOxygen } from './bay-closures.server.ts'
import { listRecord, writeRecord } from './record.server.ts'
import { fieldFault } from './register-values.server.ts'
import { signAct, useSignedAct } from './signature.server.ts'
import { instantWriter } from './site.server.ts'

const RELEASED_SHOWN = 20
const READINGS_SHOWN = 200
/** What was noted on paper is typed within two days (our own rule). */
const BACK_MS = 2 * 86_400_000

export interface ClosedBay {
  closure: BayClosureRow
  /** Readings since it was closed, the newest first. */
  readings: OxygenReading[]
  release: ReleaseRun
}

export interface BaysPageData {
  open: ClosedBay[]
  released: BayClosureRow[]
  limits: OxygenLimits
  segments: { tag: string; line: string; fromM: number; toM: number }[]
}

/** What is closed, with everything that its release rests on. @throws DomainError forbidden */
export async function readBaysPage(db: Db, actor: Actor, now: Date): Promise<BaysPageData> {
  demand(actor, 'facility:view')
  const [limits, closures, released, segments] = await Promise.all([
    readOxygenLimits(db, now),
    listOpenClosures(db),
    listReleasedClosures(db, RELEASED_SHOWN),
    listSegments(db, now),
  ])
  const open = await Promise.all(closures.map((closure) => readClosedBay(db, closure, limits, now)))
  return {
    open,
    released,
    limits,
    segments: segments.map(({ tag, lineCode, startM, endM }) => ({
      tag,
      line: lineCode,
      fromM: startM,
      toM: endM,
    })),
  }
}

async function readClosedBay(
  db: DbOrTx,
  closure: BayClosureRow,
  limits: OxygenLimits,
  now: Date,
): Promise<ClosedBay> {
  const inside = await segmentsIn(db, closure, now)
  const found = await Promise.all(inside.map(({ tag }) => readingsAt(db, tag)))
  const readings = found
    .flat()
    .filter(({ at }) => at >= closure.closedAt && at <= now)
    .sort((a, b) => b.at.getTime() - a.at.getTime())
  return { closure, readings, release: releaseRun(readings, limits, now) }
}

async function segmentsIn(
  db: DbOrTx,
  closure: BayClosureRow,
  now: Date,
): Promise<{ id: number; tag: string }[]> {
  return (await listSegments(db, now)).filter(
    ({ lineId, startM, endM }) => lineId === closure.lineId && startM < closure.toM && endM > closure.fromM,
  )
}

async function readingsAt(db: DbOrTx, tag: string): Promise<OxygenReading[]> {
  const rows = await listRecord(db, { subjectKind: OXYGEN_SUBJECT, subjectId: tag, limit: READINGS_SHOWN })
  return rows.map(({ after, effectiveAt, at }) => ({
    ...ReadOxygenSchema.parse(after),
    at: effectiveAt ?? at,
  }))
}

/**
 * Writes a reading of oxygen down. A bad one closes the stretch.
 *
 * @returns one sentence for whoever typed it; for a bad reading what to do
 * @throws DomainError forbidden, bad-input
 */
export async function typeOxygen(
  db: Db,
  actor: Actor,
  now: Date,
  form: OxygenReadingForm,
): Promise<{ closed: boolean; text: string }> {
  demand(actor, 'permit:test')
  const when = await instantWriter(db)
  if (form.at > now) {
    throw fieldFault({
      at: `Found ${when(form.at)}; expected now (${when(now)}) or earlier. Type when it was read.`,
    })
  }
  if (form.at.getTime() < now.getTime() - BACK_MS) {
    throw fieldFault({
      at: `Found ${when(form.at)}; expected a time within the last two days. Check the date.`,
    })
  }
  const segment = (await findSegments(db, [form.segment]))[0]
  if (segment === undefined) {
    throw fieldFault({ segment: `The register has no segment ${form.segment}. Choose one from the list.` })
  }
  const meter = await findMeter(db, form.instrument)
  const tester = form.tester === '' ? actor.name : form.tester
  const outcome = await tx(db, (inside) =>
    reportOxygen(
      inside,
      {
        lineId: segment.lineId,
        segmentId: segment.id,
        percent: form.percent,
        at: form.at,
        actor,
        permitId: null,
        text: `read at ${form.place} with ${meter?.name ?? form.instrument} by ${tester}`,
        place: form.place,
        instrument: meter?.name ?? form.instrument,
        tester,
      },
      now,
    ),
  )
  const said = `${form.percent.toFixed(1)} % oxygen at ${segment.tag}, written down.`
  const closed = outcome.closed ? ' The stretch is closed.' : ''
  if (outcome.answer === 'good') {
    return {
      closed: outcome.closed,
      text: `${said}${closed}${outcome.doubt === '' ? '' : ` It does not count for a release: ${outcome.doubt}`}`,
    }
  }
  const kind = outcome.answer === 'low' ? 'low-oxygen' : 'high-oxygen'
  return { closed: outcome.closed, text: `${said}${closed} ${WHAT_TO_DO[kind]}` }
}

/**
 * An officer opens a stretch again, signed. The readings that it rests on are kept with it.
 *
 * @throws DomainError forbidden, not-found, conflict (released meanwhile), not-acceptable-now (what readings lack),
 *   signature-refused
 */
export async function releaseBay(db: Db, actor: Actor, now: Date, form: BayReleaseForm): Promise<string> {
  demand(actor, 'bay:release')
  const closure = await findClosure(db, form.closureId)
  if (closure === null) throw new DomainError('not-found', 'There is no such closure.')
  if (closure.releasedAt !== null) throw wasReleased()
  const limits = await readOxygenLimits(db, now)
  requireRun((await readClosedBay(db, closure, limits, now)).release)
  const subject = {
    meaning: 'release a closed stretch of tunnel',
    subjectKind: 'bay-closure',
    subjectId: String(closure.id),
  }
  const segments = await segmentsIn(db, closure, now)
  const signed = await signAct(db, { actor, password: form.password, now, ...subject })
  await tx(db, async (inside) => {
    // First of all, so that a reading that came in meanwhile is seen and none can come in between.
    for (const { id } of segments) await lockSegment(inside, id)
    const act = await useSignedAct(inside, signed, { actor, now, ...subject })
    const { release } = await readClosedBay(inside, closure, limits, now)
    requireRun(release)
    const events = []
    for (const { id } of segments) {
      events.push(...(await lockOpenEventsAt(inside, id, ['low-oxygen', 'high-oxygen'])))
    }
    const changed = await releaseClosure(inside, closure.id, {
      releasedAt: now,
      releasedBy: actor.personId,
      releaseReadings: release.run,
      releaseReason: form.reason,
      signedActId: act.id,
    })
    if (!changed) throw wasReleased()
    for (const { id } of events) {
      await endSafetyEvent(inside, id, { at: now, by: actor.personId, reason: form.reason })
    }
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'closed stretch released',
      subjectKind: subject.subjectKind,
      subjectId: subject.subjectId,
      before: { line: closure.line, fromM: closure.fromM, toM: closure.toM, closedAt: closure.closedAt },
      after: { readings: release.run, limits },
      reason: form.reason,
      signedActId: act.id,
    })
  })
  return `${closure.line} ${closure.fromM} to ${closure.toM} m is open again.`
}

function requireRun(release: ReleaseRun): void {
  if (!release.ok) throw new DomainError('not-acceptable-now', `Not released. ${release.missing}`)
}

function wasReleased(): DomainError {
  return new DomainError('conflict', 'This stretch has been released meanwhile.')
}
