/**
 * Readings of oxygen, and the stretches of tunnel that a bad one closes. Whoever types such a reading has closed the
 * segment's stretch with it; only an officer opens it again, signed, on readings that show good air for long enough.
 */
import type { DbOrTx } from '../db/client.server.ts'
import {
  type BayClosureRow,
  findMeter,
  insertClosure,
  listOpenClosures,
  lockOpenClosures,
  lockOpenEventsAt,
  releaseReadingsSince,
} from '../db/queries/bay-closures.server.ts'
import { findSegmentById } from '../db/queries/heating.server.ts'
import { insertSafetyEvent, lockSegment } from '../db/queries/safety-events.server.ts'
import type { Actor } from '../domain/actor.ts'
import {
  judgeOxygen,
  type OxygenAnswer,
  type OxygenLimits,
  PUBLISHED_OXYGEN,
  RELEASE_PERCENT,
} from '../domain/oxygen.ts'
import { WHAT_TO_DO } from '../domain/safety-events.ts'
import { ReleaseReadingsSchema } from '../domain/schemas/bay.ts'
import { writeRecord } from './record.server.ts'
import { instantWriter } from './site.server.ts'
import { adoptedValue } from './thresholds.server.ts'

export type { BayClosureRow }

/** A bad reading of long ago says nothing about the air now: it is kept, and closes nothing (our own rule). */
const OLD_MS = 2 * 86_400_000

/** Subject of the record's lines about readings of oxygen. */
export const OXYGEN_SUBJECT = 'oxygen-reading'

/**
 * The limits that count now. Where the site has adopted none, the published figures do, because closing too much does
 * less harm than not closing; `set` then says that nobody has set them.
 */
export async function readOxygenLimits(db: DbOrTx, now: Date): Promise<OxygenLimits> {
  const [low, high, release] = await Promise.all([
    adoptedValue(db, 'oxygen-low', now),
    adoptedValue(db, 'oxygen-high', now),
    adoptedValue(db, 'oxygen-release', now),
  ])
  return {
    low: low ?? PUBLISHED_OXYGEN.low,
    high: high ?? PUBLISHED_OXYGEN.high,
    // A site may ask for more than the product does, not for less.
    release: Math.max(RELEASE_PERCENT, release ?? 0),
    set: low !== null && high !== null,
  }
}

export interface OxygenReport {
  lineId: number
  segmentId: number
  percent: number
  /** When it was read. */
  at: Date
  actor: Actor
  permitId: number | null
  /** Where and with what it was read, in words. */
  text: string
  place?: string
  instrument?: string
  tester?: string
  /** Why it does not count for a release, where the caller knows; otherwise the register is asked. */
  doubt?: string
}

export interface OxygenOutcome {
  answer: OxygenAnswer
  /** Why it does not count for a release; empty where it does. */
  doubt: string
  /** Whether the stretch is closed now, by this reading or an earlier one. */
  closed: boolean
}

/**
 * Writes a reading of oxygen down, in the transaction that has it. A bad one raises an event and closes the segment's
 * stretch, if it is not closed already; not one that newer readings of a release have overtaken, nor one of days ago.
 *
 * @param now when it is written down; the reading's own time when left out
 */
export async function reportOxygen(
  inside: DbOrTx,
  report: OxygenReport,
  now: Date = report.at,
): Promise<OxygenOutcome> {
  await lockSegment(inside, report.segmentId)
  const segment = await findSegmentById(inside, report.segmentId)
  if (segment === null) throw new Error(`There is no segment with the id ${report.segmentId}`)
  const limits = await readOxygenLimits(inside, now)
  const answer = judgeOxygen(report.percent, limits)
  const when = await instantWriter(inside)
  const doubt = report.doubt ?? (await doubtOf(inside, report, when))
  await writeRecord(inside, {
    at: now,
    actor: report.actor,
    act: 'oxygen read',
    subjectKind: OXYGEN_SUBJECT,
    subjectId: segment.tag,
    effectiveAt: report.at,
    after: {
      percent: report.percent,
      place: report.place ?? '',
      instrument: report.instrument ?? '',
      tester: report.tester ?? report.actor.name,
      doubt,
      text: report.text,
    },
  })
  const stretch = { lineId: segment.lineId, fromM: segment.startM, toM: segment.endM }
  const open = await lockOpenClosures(inside, stretch)
  const stale =
    now.getTime() - report.at.getTime() > OLD_MS || (await knownBefore(inside, stretch, report.at))
  if (answer === 'good' || stale) return { answer, doubt, closed: open.length > 0 }
  const eventId = await raise(inside, report, { segment, answer, limits, now, when })
  if (open.some((closure) => closure.fromM <= segment.startM && closure.toM >= segment.endM)) {
    return { answer, doubt, closed: true }
  }
  await insertClosure(inside, {
    ...stretch,
    reason: `${percentText(report.percent)} oxygen at ${segment.tag}: ${report.text}`.slice(0, 1000),
    eventId,
    closedAt: report.at,
    closedBy: report.actor.personId,
  })
  return { answer, doubt, closed: true }
}

/** Whether a release since rested on readings that are newer than one of this instant. */
async function knownBefore(
  inside: DbOrTx,
  stretch: { lineId: number; fromM: number; toM: number },
  at: Date,
): Promise<boolean> {
  const runs = await releaseReadingsSince(inside, stretch, at)
  return runs.some((run) => ReleaseReadingsSchema.parse(run).some((reading) => reading.at > at))
}

/** What an instrument's word is worth for a release. A bad reading is taken seriously whatever it came from. */
async function doubtOf(
  inside: DbOrTx,
  { instrument = '', at }: OxygenReport,
  when: (at: Date) => string,
): Promise<string> {
  if (instrument === '') return 'No instrument is named.'
  const meter = await findMeter(inside, instrument)
  if (meter === null) return `The register knows no instrument “${instrument}”.`
  if (meter.calibrationDue === null || meter.calibrationDue > at) return ''
  return `The calibration of ${meter.name} was due ${when(meter.calibrationDue)}.`
}

async function raise(
  inside: DbOrTx,
  report: OxygenReport,
  of: {
    segment: { id: number; tag: string }
    answer: 'low' | 'high'
    limits: OxygenLimits
    now: Date
    when: (at: Date) => string
  },
): Promise<number> {
  const kind = of.answer === 'low' ? 'low-oxygen' : 'high-oxygen'
  const standing = (await lockOpenEventsAt(inside, of.segment.id, [kind]))[0]
  if (standing !== undefined) return standing.id
  const limit =
    of.answer === 'low' ? `below ${percentText(of.limits.low)}` : `above ${percentText(of.limits.high)}`
  const basis = of.limits.set ? '' : ' (published; not set by site)'
  return insertSafetyEvent(inside, {
    kind,
    permitId: report.permitId,
    segmentId: of.segment.id,
    occurrenceKey: `${kind}:${of.segment.tag}:${report.at.toISOString()}`,
    startedAt: report.at,
    noticedAt: of.now,
    text: `${percentText(report.percent)} oxygen at ${of.segment.tag} at ${of.when(report.at)}, ${limit}${basis}. ${report.text}. ${WHAT_TO_DO[kind]}`.slice(
      0,
      1000,
    ),
  })
}

function percentText(percent: number): string {
  return `${percent.toFixed(1)} %`
}

/** Stretches that are closed now; of one line's stretch where that is asked. For pages that show the tunnel. */
export async function readClosedStretches(
  db: DbOrTx,
  on?: { lineId: number; fromM: number; toM: number },
): Promise<BayClosureRow[]> {
  return listOpenClosures(db, on)
}
