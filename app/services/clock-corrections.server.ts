/**
 * Corrections of a source's clock. A new one is written over those recorded for the same time and edits none; the times
 * of the readings stay as their files have them. What rests on the readings is marked, and their rollups are made anew.
 */
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  type ClockCorrectionRow,
  insertClockCorrection,
  listClockCorrections,
  replaceClockCorrections,
} from '../db/queries/clock-corrections.server.ts'
import { listChannels, lockSource } from '../db/queries/register-maps.server.ts'
import { findRegisterRow } from '../db/queries/register-rows.server.ts'
import { insertDue } from '../db/queries/rollups.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import {
  type ClockCorrection,
  correctionFault,
  offsetWords,
  widened,
  withOffset,
} from '../domain/clock-correction.ts'
import { overlaps } from '../domain/dated-spans.ts'
import { DomainError } from '../domain/errors.ts'
import type { ClockCorrectionForm } from '../domain/schemas/register-dated.ts'
import { writeRecord } from './record.server.ts'
import { fieldFault } from './register-values.server.ts'
import { markOutOfDate } from './revisions.server.ts'
import { instantWriter } from './site.server.ts'

/**
 * Says how far a source's clock was off from one instant to another, by its own time. What is recorded for any of that
 * time is replaced; the parts of it outside are kept with the offsets they had. With no offset at both ends the stretch
 * is only taken out.
 *
 * @throws DomainError forbidden, not-found, conflict (changed since the form was made), bad-input
 */
export async function correctClock(
  db: Db,
  actor: Actor,
  now: Date,
  sourceCode: string,
  form: ClockCorrectionForm,
): Promise<void> {
  demand(actor, 'register:edit')
  await tx(db, async (inside) => {
    const source = await findRegisterRow(inside, 'sources', sourceCode)
    if (source === null) throw new DomainError('not-found', `The register has no source ${sourceCode}.`)
    await lockSource(inside, source.id)
    const held = (await listClockCorrections(inside, source.id)).filter(
      ({ replacedAt }) => replacedAt === null,
    )
    const written = await instantWriter(inside)
    refuseStale(held, form.seen, source.tag, written)
    const added = asCorrection(form)
    const takesOut = added.startOffsetMs === 0 && added.endOffsetMs === 0
    const touched = held.filter((row) => overlaps(row, form))
    if (takesOut && touched.length === 0)
      throw fieldFault({
        endOffset: 'Both offsets are nought, and nothing is corrected in this time yet. Give the drift.',
      })
    const fault = takesOut ? null : correctionFault(added)
    if (fault !== null) throw fieldFault({ [fault.field]: fault.text })

    const remnants = touched.flatMap((row) => outside(row, form).map((part) => ({ row, part })))
    await replaceClockCorrections(
      inside,
      touched.map(({ id }) => id),
      { replacedAt: now, replacedBy: actor.personId, replaceReason: form.reason },
    )
    const by = { sourceId: source.id, recordedBy: actor.personId, recordedAt: now }
    for (const { row, part } of remnants)
      await insertClockCorrection(inside, { ...by, ...columnsOf(part), basis: row.basis })
    if (!takesOut) await insertClockCorrection(inside, { ...by, ...columnsOf(added), basis: form.reason })
    const before = touched.map(correctionOf)
    await renew(inside, source.id, [...before, added], {
      now,
      reason: `The clock of ${source.tag} was corrected from ${written(form.startsAt)}: ${form.reason}`,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'source clock corrected',
      subjectKind: 'source',
      subjectId: source.tag,
      effectiveAt: form.startsAt,
      before: before.map(lineOf),
      after: [...remnants.map(({ part }) => part), ...(takesOut ? [] : [added])].map(lineOf),
      reason: form.reason,
    })
  })
}

function refuseStale(
  held: readonly ClockCorrectionRow[],
  seen: number,
  source: string,
  written: (at: Date) => string,
): void {
  const newest = held.reduce((highest, { id }) => Math.max(highest, id), 0)
  if (newest === seen) return
  const row = held.find(({ id }) => id === newest)
  const told = row === undefined ? '' : ` ${row.recordedBy} corrected it from ${written(row.startsAt)}.`
  throw new DomainError(
    'conflict',
    `The clock of ${source} has been corrected since you opened this form.${told} Nothing of yours has been saved: look at the present corrections and do it again.`,
  )
}

/** What is left of a recorded correction before and after a stretch, with the offsets it has there. */
function outside(
  row: ClockCorrectionRow,
  { startsAt, endsAt }: { startsAt: Date; endsAt: Date },
): ClockCorrection[] {
  const whole = correctionOf(row)
  const offsetAt = (ms: number): number => withOffset(ms, whole) - ms
  const parts: ClockCorrection[] = []
  if (row.startsAt < startsAt) {
    const cut = startsAt.getTime()
    parts.push({ ...whole, endsMs: cut, endOffsetMs: offsetAt(cut) })
  }
  if (row.endsAt > endsAt) {
    const cut = endsAt.getTime()
    parts.push({ ...whole, startsMs: cut, startOffsetMs: offsetAt(cut) })
  }
  return parts.filter(({ startOffsetMs, endOffsetMs }) => startOffsetMs !== 0 || endOffsetMs !== 0)
}

/** Marks what rests on the corrected time, before and after, and has its rollups made anew. */
async function renew(
  inside: DbOrTx,
  sourceId: number,
  changed: readonly ClockCorrection[],
  why: { now: Date; reason: string },
): Promise<void> {
  const channels = (await listChannels(inside)).filter((row) => row.sourceId === sourceId)
  const spans = changed.map((one) => widened([one], one.startsMs, one.endsMs))
  const stretches = channels.flatMap(({ id }) =>
    spans.map(({ fromMs, lastMs }) => ({ channelId: id, from: new Date(fromMs), to: new Date(lastMs) })),
  )
  await insertDue(
    inside,
    stretches.map(({ channelId, from, to }) => ({ channelId, from, last: to })),
  )
  await markOutOfDate(inside, { stretches, ...why })
}

function asCorrection(form: ClockCorrectionForm): ClockCorrection {
  return {
    startsMs: form.startsAt.getTime(),
    endsMs: form.endsAt.getTime(),
    startOffsetMs: form.startOffset,
    endOffsetMs: form.endOffset,
  }
}

function correctionOf(row: ClockCorrectionRow): ClockCorrection {
  return {
    startsMs: row.startsAt.getTime(),
    endsMs: row.endsAt.getTime(),
    startOffsetMs: row.startMs,
    endOffsetMs: row.endMs,
  }
}

function columnsOf({ startsMs, endsMs, startOffsetMs, endOffsetMs }: ClockCorrection) {
  return {
    startsAt: new Date(startsMs),
    endsAt: new Date(endsMs),
    startMs: startOffsetMs,
    endMs: endOffsetMs,
  }
}

/** A correction as it goes on record. */
function lineOf({ startsMs, endsMs, startOffsetMs, endOffsetMs }: ClockCorrection) {
  return {
    from: new Date(startsMs),
    to: new Date(endsMs),
    atStart: offsetWords(startOffsetMs),
    atEnd: offsetWords(endOffsetMs),
  }
}
