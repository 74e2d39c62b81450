/** Setting limits and targets. The former value goes on holding for the past; nothing that was judged is judged anew. */
import type { Db } from '../db/client.server.ts'
import {
  type DatedLimit,
  insertLimit,
  listDatedLimits,
  lockLimits,
  replaceLimits,
} from '../db/queries/register-limits.server.ts'
import { listSegmentPlaces } from '../db/queries/register-rows.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { nextChange, type Span, spanAt, writeOver } from '../domain/dated-spans.ts'
import { DomainError } from '../domain/errors.ts'
import { LIMIT_KIND_FACTS, type LimitKind } from '../domain/register.ts'
import type { LimitForm } from '../domain/schemas/register-dated.ts'
import { writeRecord } from './record.server.ts'
import { fieldFault, segmentByTag } from './register-values.server.ts'
import { instantWriter } from './site.server.ts'

/** A form that was opened a while ago still counts as "from now on". */
const BACK_MS = 60 * 60_000

/**
 * Sets a limit from an instant on, for the whole site or for one segment; without a value a segment goes back to the
 * site's limit. It holds until the next change that is recorded already, or for good.
 *
 * @throws DomainError forbidden (an engineer's to decide), conflict (changed since the form was made), bad-input
 *   (reaches into the past, changes nothing, unknown segment)
 */
export async function setLimit(
  db: Db,
  actor: Actor,
  now: Date,
  kind: LimitKind,
  form: LimitForm,
): Promise<void> {
  demand(actor, 'limit:edit')
  if (form.startsAt.getTime() < now.getTime() - BACK_MS) {
    throw fieldFault({
      startsAt:
        'A limit reaches no more than an hour back: what was judged by the old one stays judged. Give a time from now on.',
    })
  }
  await tx(db, async (inside) => {
    await lockLimits(inside)
    const place = form.segment === '' ? null : segmentByTag(form.segment, await listSegmentPlaces(inside))
    const all = await listDatedLimits(inside, { kind })
    refuseStale(all, form.seen, kind, await instantWriter(inside))
    const limits = all.filter(({ segmentId }) => segmentId === (place?.id ?? null))
    const window: Span = { startsAt: form.startsAt, endsAt: nextChange(limits, form.startsAt) }
    const former = spanAt(limits, form.startsAt) ?? null
    if ((former?.value ?? null) === form.value) {
      throw fieldFault({
        value:
          former === null
            ? `${place?.tag ?? 'The site'} has no limit of its own at that time.`
            : 'This is the value that holds at that time already.',
      })
    }
    const { replaced, remnants } = writeOver(limits, window)
    await replaceLimits(
      inside,
      replaced.map(({ id }) => id),
      now,
    )
    for (const { of, startsAt, endsAt } of remnants) {
      const { value, unit, reason, setById } = of
      await insertLimit(inside, {
        kind,
        segmentId: place?.id ?? null,
        value,
        unit,
        reason,
        setBy: setById,
        startsAt,
        endsAt,
        recordedAt: now,
      })
    }
    const { unit } = LIMIT_KIND_FACTS[kind]
    if (form.value !== null) {
      await insertLimit(inside, {
        kind,
        segmentId: place?.id ?? null,
        value: form.value,
        unit,
        reason: form.reason,
        setBy: actor.personId,
        startsAt: window.startsAt,
        endsAt: window.endsAt,
        recordedAt: now,
      })
    }
    await writeRecord(inside, {
      at: now,
      actor,
      act: form.value === null ? 'limit taken away' : 'limit set',
      subjectKind: 'limit',
      subjectId: kind,
      effectiveAt: form.startsAt,
      before: { segment: place?.tag ?? null, value: former?.value ?? null, unit },
      after: { segment: place?.tag ?? null, value: form.value, unit },
      reason: form.reason,
    })
  })
}

function refuseStale(
  limits: readonly DatedLimit[],
  seen: number,
  kind: LimitKind,
  written: (at: Date) => string,
): void {
  const newest = limits.reduce((highest, { id }) => Math.max(highest, id), 0)
  if (newest === seen) return
  const row = limits.find(({ id }) => id === newest)
  const told =
    row === undefined
      ? ''
      : ` ${row.setBy ?? 'The product'} set ${row.value} ${row.unit} for ${row.segment ?? 'the site'} from ${written(row.startsAt)}.`
  throw new DomainError(
    'conflict',
    `"${LIMIT_KIND_FACTS[kind].label}" has been changed since you opened this form.${told} Nothing of yours has been saved: look at the present value and do it again.`,
  )
}
