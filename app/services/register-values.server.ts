/** Between a row of the register and the values of its form: segments by tag, speeds by gas, everything else as it is. */
import type { Stretch } from '../db/queries/derived.server.ts'
import type { RegisterRow, SegmentPlace } from '../db/queries/register-rows.server.ts'
import type { Span } from '../domain/dated-spans.ts'
import { DomainError, type FieldErrors } from '../domain/errors.ts'
import type { PumpSpeeds } from '../domain/register.ts'
import { type EditedKind, KIND_FACTS } from '../domain/schemas/register.ts'
import type { FieldValue } from '../domain/schemas/register-values.ts'

export type Values = Record<string, FieldValue>

/** The error of a form in which something is wrong that only the register can tell. */
export function fieldFault(fields: Record<string, string>): DomainError {
  const listed: FieldErrors = Object.fromEntries(Object.entries(fields).map(([name, text]) => [name, [text]]))
  const count = Object.keys(listed).length
  return new DomainError(
    'bad-input',
    count === 1
      ? 'One field needs another look; nothing has been saved.'
      : `${count} fields need another look; nothing has been saved.`,
    { fields: listed },
  )
}

/** Values of a row under the names of the form's fields. */
export function valuesOf(kind: EditedKind, row: RegisterRow, places: readonly SegmentPlace[]): Values {
  const values: Values = {}
  const speeds = (row.columns.speeds ?? {}) as PumpSpeeds
  for (const field of KIND_FACTS[kind].fields) {
    if (field.gas !== null) values[field.name] = speeds[field.gas] ?? null
    else if (field.input === 'segment') values[field.name] = segmentTag(row, places)
    else values[field.name] = (row.columns[field.name] ?? null) as FieldValue
  }
  return values
}

function segmentTag(row: RegisterRow, places: readonly SegmentPlace[]): string {
  return places.find(({ id }) => id === row.columns.segmentId)?.tag ?? ''
}

/**
 * Columns to store for a form's values.
 *
 * @throws DomainError bad-input when the form names a segment that the register does not have
 */
export function columnsOf(
  kind: EditedKind,
  values: Values,
  places: readonly SegmentPlace[],
): Record<string, unknown> {
  const columns: Record<string, unknown> = {}
  const speeds: PumpSpeeds = {}
  for (const field of KIND_FACTS[kind].fields) {
    const value = values[field.name] ?? null
    if (field.gas !== null) {
      if (typeof value === 'number') speeds[field.gas] = value
    } else if (field.input === 'segment') {
      columns.segmentId = value === '' ? null : segmentByTag(String(value), places).id
    } else columns[field.name] = value
  }
  if (kind === 'pumps') columns.speeds = speeds
  return columns
}

/** The segment with a tag. */
export function segmentByTag(tag: string, places: readonly SegmentPlace[]): SegmentPlace {
  const found = places.find((place) => place.tag.toLowerCase() === tag.toLowerCase())
  if (found !== undefined) return found
  throw fieldFault({ segment: `The register has no segment "${tag}". Choose one from the list.` })
}

function same(a: FieldValue, b: FieldValue): boolean {
  if (a instanceof Date && b instanceof Date) return a.getTime() === b.getTime()
  return a === b
}

/** Only what differs, as it was and as it is to be. */
export function differences(before: Values, after: Values): { before: Values; after: Values } {
  const names = Object.keys(after).filter((name) => !same(before[name] ?? null, after[name] ?? null))
  return {
    before: Object.fromEntries(names.map((name) => [name, before[name] ?? null])),
    after: Object.fromEntries(names.map((name) => [name, after[name] ?? null])),
  }
}

/** The last instant that the database can hold: the end of what has none. */
const LAST = new Date('9999-12-31T23:59:59.999Z')

/** The time of a channel over which something changed, for marking what rests on it. */
export function stretchOf(channelId: number, span: Span): Stretch {
  return { channelId, from: span.startsAt, to: span.endsAt ?? LAST }
}
