/** Which instrument sits at a position, from when to when, with the factor that its readings are multiplied by. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  type FittingRow,
  insertFitting,
  listFittings,
  listMaps,
  lockInstrument,
  replaceFittings,
} from '../db/queries/register-maps.server.ts'
import { findRegisterRow, lockRegisterRow, type RegisterRow } from '../db/queries/register-rows.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { clip, nextChange, overlaps, type Span, writeOver } from '../domain/dated-spans.ts'
import { DomainError } from '../domain/errors.ts'
import type { FittingForm } from '../domain/schemas/register-dated.ts'
import { writeRecord } from './record.server.ts'
import { fieldFault, stretchOf } from './register-values.server.ts'
import { markOutOfDate } from './revisions.server.ts'
import { instantWriter } from './site.server.ts'

/**
 * Puts an instrument at a position from an instant on (until the given end, or else until the next change recorded
 * for the position), or takes out what sits there. Readings before the instant keep the former factor.
 *
 * @throws DomainError forbidden, not-found, conflict (changed since the form was made), bad-input (the instrument is
 *   unknown, measures another quantity, or sits elsewhere in that time)
 */
export async function fitInstrument(
  db: Db,
  actor: Actor,
  now: Date,
  tag: string,
  form: FittingForm,
): Promise<void> {
  demand(actor, 'register:edit')
  await tx(db, async (inside) => {
    const position = await lockRegisterRow(inside, 'positions', tag)
    if (position === null) throw new DomainError('not-found', `The register has no position ${tag}.`)
    const fittings = await listFittings(inside, { positionId: position.id })
    const written = await instantWriter(inside)
    refuseStale(fittings, form.seen, position.tag, written)
    const window: Span = {
      startsAt: form.startsAt,
      endsAt: form.endsAt ?? nextChange(fittings, form.startsAt),
    }
    const instrument = form.serial === '' ? null : await instrumentFor(inside, position, form.serial)
    if (instrument !== null) await refuseElsewhere(inside, instrument, position, window)
    const before = clip(fittings, window)
    if (saysTheSame(before, window, instrument?.id ?? null, form.factor)) {
      throw fieldFault({
        serial:
          instrument === null
            ? 'Nothing sits there in this time already.'
            : `${instrument.tag} sits there with this factor already.`,
      })
    }
    const { replaced, remnants } = writeOver(fittings, window)
    await replaceFittings(
      inside,
      replaced.map(({ id }) => id),
      now,
    )
    const writer = { positionId: position.id, recordedBy: actor.personId, recordedAt: now }
    for (const { of, startsAt, endsAt } of remnants) {
      const { instrumentId, factor, reason } = of
      await insertFitting(inside, { ...writer, instrumentId, factor, reason, startsAt, endsAt })
    }
    if (instrument !== null) {
      await insertFitting(inside, {
        ...writer,
        instrumentId: instrument.id,
        factor: form.factor,
        reason: form.reason,
        startsAt: window.startsAt,
        endsAt: window.endsAt,
      })
    }
    // What rests on the channels that belong to this position was computed with the former factor.
    const maps = clip(await listMaps(inside, { positionId: position.id }), window)
    await markOutOfDate(inside, {
      stretches: maps.map((part) => stretchOf(part.of.channelId, part)),
      now,
      reason: `The instrument at ${position.tag} was changed from ${written(form.startsAt)}: ${form.reason}`,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: instrument === null ? 'instrument taken out' : 'instrument fitted',
      subjectKind: 'position',
      subjectId: position.tag,
      effectiveAt: form.startsAt,
      before: before.map(({ of, startsAt, endsAt }) => ({
        instrument: of.serial,
        factor: of.factor,
        from: startsAt,
        to: endsAt,
      })),
      after:
        instrument === null
          ? [{ instrument: null, from: window.startsAt, to: window.endsAt }]
          : [{ instrument: instrument.tag, factor: form.factor, from: window.startsAt, to: window.endsAt }],
      reason: form.reason,
    })
  })
}

function refuseStale(
  fittings: readonly FittingRow[],
  seen: number,
  tag: string,
  written: (at: Date) => string,
): void {
  const newest = fittings.reduce((highest, { id }) => Math.max(highest, id), 0)
  if (newest === seen) return
  const row = fittings.find(({ id }) => id === newest)
  const told =
    row === undefined
      ? ''
      : ` ${row.recordedBy ?? 'The product'} put ${row.serial} there from ${written(row.startsAt)}.`
  throw new DomainError(
    'conflict',
    `What sits at ${tag} has been changed since you opened this form.${told} Nothing of yours has been saved: look at the present state and do it again.`,
  )
}

async function instrumentFor(inside: DbOrTx, position: RegisterRow, serial: string): Promise<RegisterRow> {
  const row = await findRegisterRow(inside, 'instruments', serial)
  if (row === null)
    throw fieldFault({
      serial: `The register has no instrument "${serial}". Give a serial number such as Q-8120, or add the instrument first.`,
    })
  if (row.columns.quantity === position.columns.quantity) return row
  throw fieldFault({
    serial: `${row.tag} measures ${String(row.columns.quantity)}, ${position.tag} ${String(position.columns.quantity)}.`,
  })
}

/** An instrument is in one place at a time. Its row is locked, so that two people cannot put it into two. */
async function refuseElsewhere(
  inside: DbOrTx,
  instrument: RegisterRow,
  position: RegisterRow,
  window: Span,
): Promise<void> {
  await lockInstrument(inside, instrument.id)
  const elsewhere = (await listFittings(inside, { instrumentId: instrument.id })).find(
    (row) => row.positionId !== position.id && overlaps(row, window),
  )
  if (elsewhere === undefined) return
  const written = await instantWriter(inside)
  const until = elsewhere.endsAt === null ? 'and still does' : `until ${written(elsewhere.endsAt)}`
  throw fieldFault({
    serial: `${instrument.tag} sits at ${elsewhere.position} from ${written(elsewhere.startsAt)} ${until}. Take it out there first.`,
  })
}

function saysTheSame(
  before: readonly { of: FittingRow; startsAt: Date; endsAt: Date | null }[],
  window: Span,
  instrumentId: number | null,
  factor: number,
): boolean {
  if (instrumentId === null) return before.length === 0
  const [only] = before
  return (
    before.length === 1 &&
    only?.of.instrumentId === instrumentId &&
    only.of.factor === factor &&
    only.startsAt.getTime() === window.startsAt.getTime() &&
    (only.endsAt?.getTime() ?? null) === (window.endsAt?.getTime() ?? null)
  )
}
