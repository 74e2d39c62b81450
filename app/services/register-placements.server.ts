/** Where a pump works: one place at a time, from when to when. Carts move; the former place stays readable. */
import type { Db } from '../db/client.server.ts'
import { endPlacement, insertPlacement, listPlacements } from '../db/queries/register-limits.server.ts'
import { listSegmentPlaces, lockRegisterRow, updateRegisterRow } from '../db/queries/register-rows.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import type { PlacementForm } from '../domain/schemas/register-dated.ts'
import { writeRecord } from './record.server.ts'
import { changedMeanwhile, MOVED } from './register-edit.server.ts'
import { fieldFault, segmentByTag } from './register-values.server.ts'
import { instantWriter } from './site.server.ts'

/**
 * Puts a pump to work at a place from an instant on, or, without a segment, lets it stand idle. `seen` is the pump's
 * revision, which every move counts up.
 *
 * @throws DomainError forbidden, not-found, conflict (changed since the form was made), bad-input (off the segment,
 *   before a place that is recorded already, or no change)
 */
export async function placePump(
  db: Db,
  actor: Actor,
  now: Date,
  tag: string,
  form: PlacementForm,
): Promise<void> {
  demand(actor, 'register:edit')
  await tx(db, async (inside) => {
    const pump = await lockRegisterRow(inside, 'pumps', tag)
    if (pump === null) throw new DomainError('not-found', `The register has no pump ${tag}.`)
    if (pump.revision !== form.seen) throw await changedMeanwhile(inside, 'pumps', pump, form.seen)
    const place = form.segment === '' ? null : segmentByTag(form.segment, await listSegmentPlaces(inside))
    const offsetM = form.offsetM ?? 0
    if (place !== null && offsetM > place.endM - place.startM) {
      throw fieldFault({
        offsetM: `${place.tag} is ${place.endM - place.startM} m long; ${offsetM} m from its start lies beyond it.`,
      })
    }
    const [last] = await listPlacements(inside, { pumpId: pump.id })
    if (last !== undefined && form.startsAt <= last.startsAt) {
      const written = await instantWriter(inside)
      throw fieldFault({
        startsAt: `A later place is recorded: ${last.segment} from ${written(last.startsAt)}. Give a time after it.`,
      })
    }
    const before = last !== undefined && (last.endsAt === null || last.endsAt > form.startsAt) ? last : null
    if (place === null ? before === null : before?.segmentId === place.id && before.offsetM === offsetM) {
      throw fieldFault({
        segment:
          place === null
            ? `${pump.tag} stands idle at that time already.`
            : `${pump.tag} works there at that time already.`,
      })
    }
    if (before !== null) await endPlacement(inside, before.id, form.startsAt)
    if (place !== null) {
      await insertPlacement(inside, {
        pumpId: pump.id,
        segmentId: place.id,
        offsetM,
        startsAt: form.startsAt,
        reason: form.reason,
      })
    }
    await updateRegisterRow(inside, 'pumps', pump.id, {})
    await writeRecord(inside, {
      at: now,
      actor,
      act: MOVED,
      subjectKind: 'pump',
      subjectId: pump.tag,
      effectiveAt: form.startsAt,
      before: { segment: before?.segment ?? '', offsetM: before?.offsetM ?? null },
      after: { segment: place?.tag ?? '', offsetM: place === null ? null : offsetM },
      reason: form.reason,
    })
  })
}
