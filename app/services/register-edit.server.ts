/** Editing and adding things of the register: dated, with a reason, on record, and never over somebody else's edit. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import { isDuplicate } from '../db/errors.server.ts'
import { countMapsOfPosition } from '../db/queries/register-maps.server.ts'
import {
  insertRegisterRow,
  listSegmentPlaces,
  lockLine,
  lockRegisterRow,
  type RegisterRow,
  type SegmentPlace,
  updateRegisterRow,
} from '../db/queries/register-rows.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { type EditedKind, type EditedValues, KIND_FACTS } from '../domain/schemas/register.ts'
import { listRecord, writeRecord } from './record.server.ts'
import { columnsOf, differences, fieldFault, type Values, valuesOf } from './register-values.server.ts'

/** A form may be this far ahead of the product's clock: clocks on site differ a little. */
const AHEAD_MS = 5 * 60_000
const EDITED = 'register entry changed'
const ADDED = 'register entry added'
/** A pump that moved: counts the pump's revision up as an edit does. */
export const MOVED = 'pump moved'

/**
 * Changes one thing of the register.
 *
 * @throws DomainError forbidden, not-found, bad-input (nothing differs, holds only later, does not fit its
 *   neighbours), conflict (somebody else has changed it since the form was made)
 */
export async function editThing(
  db: Db,
  actor: Actor,
  now: Date,
  kind: EditedKind,
  tag: string,
  form: EditedValues,
): Promise<void> {
  demand(actor, 'register:edit')
  refuseLater(form.validFrom, now)
  const { one, subject } = KIND_FACTS[kind]
  await tx(db, async (inside) => {
    const row = await lockRegisterRow(inside, kind, tag)
    if (row === null) throw new DomainError('not-found', `The register has no ${one} ${tag}.`)
    if (row.revision !== form.revision) throw await changedMeanwhile(inside, kind, row, form.revision)
    const places = await listSegmentPlaces(inside)
    const before = valuesOf(kind, row, places)
    const changed = differences(before, form.values)
    if (Object.keys(changed.after).length === 0) {
      throw new DomainError(
        'bad-input',
        `Nothing differs from what is recorded of ${row.tag}; nothing has been saved.`,
      )
    }
    const columns = columnsOf(kind, form.values, places)
    await checkAgainstRegister(inside, kind, row, form.values, changed.after, places)
    await updateRegisterRow(inside, kind, row.id, columns)
    await writeRecord(inside, {
      at: now,
      actor,
      act: EDITED,
      subjectKind: subject,
      subjectId: row.tag,
      effectiveAt: form.validFrom,
      before: changed.before,
      after: changed.after,
      reason: form.reason,
    })
  })
}

/**
 * Adds a thing to the register.
 *
 * @throws DomainError forbidden, bad-input (the name is taken, or something does not fit)
 */
export async function addThing(
  db: Db,
  actor: Actor,
  now: Date,
  kind: EditedKind,
  form: EditedValues,
): Promise<void> {
  demand(actor, 'register:edit')
  refuseLater(form.validFrom, now)
  const { one, tag, subject } = KIND_FACTS[kind]
  if (tag === null) throw new DomainError('not-found', `No ${one} is added by form.`)
  try {
    await tx(db, async (inside) => {
      const places = await listSegmentPlaces(inside)
      const columns = columnsOf(kind, form.values, places)
      await checkAgainstRegister(inside, kind, null, form.values, form.values, places)
      if (kind === 'positions')
        columns.lineId = places.find(({ id }) => id === columns.segmentId)?.lineId ?? null
      await insertRegisterRow(inside, kind, form.tag, columns)
      await writeRecord(inside, {
        at: now,
        actor,
        act: ADDED,
        subjectKind: subject,
        subjectId: form.tag,
        effectiveAt: form.validFrom,
        after: form.values,
        reason: form.reason,
      })
    })
  } catch (error) {
    if (!isDuplicate(error)) throw error
    throw fieldFault({
      tag: `The register has a ${one} ${form.tag} already. Open that one, or give another name.`,
    })
  }
}

/** These facts stand in one row and hold when saved; a plan for later belongs into a log entry or a dated row. */
function refuseLater(validFrom: Date, now: Date): void {
  if (validFrom.getTime() <= now.getTime() + AHEAD_MS) return
  throw fieldFault({
    validFrom:
      'This lies in the future. The change holds as soon as it is saved: give the time since when it is so.',
  })
}

/** The refusal that says who changed what since a form was made. */
export async function changedMeanwhile(
  inside: DbOrTx,
  kind: EditedKind,
  row: RegisterRow,
  revision: number,
): Promise<DomainError> {
  const { subject, fields } = KIND_FACTS[kind]
  const lines = await listRecord(inside, { subjectKind: subject, subjectId: row.tag, limit: 50 })
  const edits = lines
    .filter(({ act }) => act === EDITED || act === MOVED)
    .slice(0, Math.max(1, row.revision - revision))
  const label = (name: string) => fields.find((field) => field.name === name)?.label ?? name
  const told = edits.map(({ person, before, after }) => {
    const [was, is] = [before as Values, after as Values]
    const changes = Object.keys(is).map(
      (name) => `${label(name)} from ${shown(was[name])} to ${shown(is[name])}`,
    )
    return `${person ?? 'The product'} changed ${changes.join(', ')}.`
  })
  return new DomainError(
    'conflict',
    `${row.tag} has been changed since you opened this form. ${told.join(' ')} Nothing of yours has been saved: look at the present values and make your change again.`,
  )
}

function shown(value: unknown): string {
  if (value === null || value === undefined || value === '') return 'nothing'
  if (typeof value === 'boolean') return value ? 'yes' : 'no'
  return String(value)
}

/** What one form cannot see: neighbours on the line, the segment a position lies on, channels that measure another quantity. */
async function checkAgainstRegister(
  inside: DbOrTx,
  kind: EditedKind,
  row: RegisterRow | null,
  values: Values,
  changed: Values,
  places: readonly SegmentPlace[],
): Promise<void> {
  if (kind === 'segments' && row !== null) await checkSegment(inside, row, values, places)
  if (kind !== 'positions') return
  const place = places.find(({ tag }) => tag === values.segment)
  const chainage = values.chainageM
  if (
    place !== undefined &&
    typeof chainage === 'number' &&
    (chainage < place.startM || chainage > place.endM)
  ) {
    throw fieldFault({
      chainageM: `${place.tag} runs from ${place.startM} to ${place.endM} m; ${chainage} m is not on it.`,
    })
  }
  if (row === null || changed.quantity === undefined) return
  const maps = await countMapsOfPosition(inside, row.id)
  if (maps > 0) {
    throw fieldFault({
      quantity: `Channels have been mapped to ${row.tag} as ${String(row.columns.quantity)}. Add a new position for another quantity.`,
    })
  }
}

async function checkSegment(
  inside: DbOrTx,
  row: RegisterRow,
  values: Values,
  places: readonly SegmentPlace[],
): Promise<void> {
  const own = places.find(({ id }) => id === row.id)
  const line = own === undefined ? null : await lockLine(inside, own.lineId)
  if (own === undefined || line === null)
    throw new DomainError('not-found', `${row.tag} lies on no line of the register.`)
  const [start, end] = [Number(values.startM), Number(values.endM)]
  if (end > line.lengthM) throw fieldFault({ endM: `The line ${line.code} ends at ${line.lengthM} m.` })
  // Read again behind the lock: a neighbour may just have been moved.
  const neighbours = (await listSegmentPlaces(inside)).filter(
    ({ lineId, id }) => lineId === own.lineId && id !== row.id,
  )
  const hit = neighbours.find((other) => start < other.endM && other.startM < end)
  if (hit === undefined) return
  const field = start < hit.startM ? 'endM' : 'startM'
  throw fieldFault({
    [field]: `${hit.tag} lies from ${hit.startM} to ${hit.endM} m; two segments cannot share tube. Move that one first.`,
  })
}
