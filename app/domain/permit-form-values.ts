/** What stands in the fields of the permit form: made from a content or from what was posted, merged, with rows added. */
import type { PermitContent } from './permit-content.ts'
import { HAZARD_KEYS, type HazardKey } from './permit-words.ts'
import { MOST_ROWS, type RowKind } from './schemas/permit-form.ts'
import { typedInstant } from './schemas/permit-form-fields.ts'

interface RelatedRow {
  kind: string
  number: string
}

interface PointRow {
  tag: string
  isolates: string
  required: string
  purpose: string
  boxed: string
}

interface TestRow {
  kind: string
  place: string
  low: string
  high: string
  unit: string
  everyHours: string
}

interface ContactRow {
  role: string
  name: string
  phone: string
}

/** Fields of one text each. */
const TEXT_FIELDS = [
  'title',
  'planId',
  'planVersion',
  'segment',
  'second',
  'fromM',
  'toM',
  'bays',
  'exclusionWestM',
  'exclusionEastM',
  'equipment',
  'work',
  'notIncluded',
  'maxCelsius',
  'rampKH',
  'soakHours',
  'supply',
  'maxAmps',
  'maxVolts',
  'openCircuitVolts',
  'earthing',
  'unattended',
  'nightCover',
  'holderId',
  'isolatingPersonId',
  'electricianId',
  'attendantId',
  'from',
  'to',
  'shifts',
  'protectiveEquipment',
  'barriers',
  'signs',
  'lighting',
  'rescue',
  'assemblyPoint',
] as const
export type TextField = (typeof TEXT_FIELDS)[number]

const BLANK_ROWS = {
  related: { kind: 'electrical', number: '' },
  points: { tag: '', isolates: '', required: '', purpose: 'to-heat', boxed: 'no' },
  tests: { kind: '', place: '', low: '', high: '', unit: '', everyHours: '' },
  contacts: { role: '', name: '', phone: '' },
} as const

/** The form as text, field by field, as react-hook-form and a posted form both hold it. */
export interface PermitFormValues extends Record<TextField, string> {
  related: RelatedRow[]
  annex: { alarms: string; onCallMinutes: string; shutOff: string }
  deputyIds: string[]
  crewIds: string[]
  hazards: Record<HazardKey, { applies: string; text: string }>
  points: PointRow[]
  tests: TestRow[]
  contacts: ContactRow[]
}

const figureText = (value: number | null) => (value === null ? '' : String(value))
const answerText = (value: boolean | null | undefined) =>
  value === null || value === undefined ? '' : value ? 'yes' : 'no'

/** @param zone the site's time zone, in which the window is written */
export function permitFormValues(content: PermitContent, zone: string): PermitFormValues {
  const instant = (iso: string | null) => (iso === null ? '' : typedInstant(new Date(iso), zone))
  const { annex } = content
  return {
    title: content.title,
    related: content.related.map((one) => ({ ...one })),
    planId: figureText(content.planId),
    planVersion: figureText(content.planVersion),
    segment: content.segments[0] ?? '',
    second: content.segments[1] ?? '',
    fromM: figureText(content.fromM),
    toM: figureText(content.toM),
    bays: content.bays,
    exclusionWestM: figureText(content.exclusionWestM),
    exclusionEastM: figureText(content.exclusionEastM),
    equipment: content.equipment.join('\n'),
    work: content.work,
    notIncluded: content.notIncluded,
    maxCelsius: figureText(content.maxCelsius),
    rampKH: figureText(content.rampKH),
    soakHours: figureText(content.soakHours),
    supply: content.supply ?? '',
    maxAmps: figureText(content.maxAmps),
    maxVolts: figureText(content.maxVolts),
    openCircuitVolts: figureText(content.openCircuitVolts),
    earthing: content.earthing,
    unattended: answerText(content.unattended),
    nightCover: content.nightCover,
    annex: { ...annex, onCallMinutes: figureText(annex.onCallMinutes) },
    holderId: figureText(content.holderId),
    deputyIds: content.deputyIds.map(String),
    crewIds: content.crewIds.map(String),
    isolatingPersonId: figureText(content.isolatingPersonId),
    electricianId: figureText(content.electricianId),
    attendantId: figureText(content.attendantId),
    from: instant(content.from),
    to: instant(content.to),
    shifts: content.shifts,
    hazards: byHazard((key) => {
      const answer = content.hazards[key]
      return { applies: answerText(answer?.applies), text: answer?.text ?? '' }
    }),
    points: content.points.map((one) => ({ ...one, boxed: answerText(one.boxed) })),
    tests: content.tests.map((one) => ({
      kind: one.kind,
      place: one.place,
      low: figureText(one.low),
      high: figureText(one.high),
      unit: one.unit,
      everyHours: figureText(one.everyHours),
    })),
    protectiveEquipment: content.protectiveEquipment,
    barriers: content.barriers,
    signs: content.signs,
    lighting: content.lighting,
    rescue: content.rescue,
    assemblyPoint: content.assemblyPoint,
    contacts: content.contacts.map((one) => ({ ...one })),
  }
}

function byHazard<Value>(of: (key: HazardKey) => Value): Record<HazardKey, Value> {
  return Object.fromEntries(HAZARD_KEYS.map((key) => [key, of(key)])) as Record<HazardKey, Value>
}

/** The fields of a posted form. A name that nobody sent counts as left empty. */
export function postedValues(form: FormData): PermitFormValues {
  const one = (name: string): string => {
    const value = form.getAll(name).at(-1)
    return typeof value === 'string' ? value : ''
  }
  const several = (name: string) => form.getAll(name).filter((value) => typeof value === 'string')
  const texts = Object.fromEntries(TEXT_FIELDS.map((name) => [name, one(name)])) as Record<TextField, string>
  return {
    ...texts,
    annex: {
      alarms: one('annex.alarms'),
      onCallMinutes: one('annex.onCallMinutes'),
      shutOff: one('annex.shutOff'),
    },
    deputyIds: several('deputyIds'),
    crewIds: several('crewIds'),
    hazards: byHazard((key) => ({
      applies: one(`hazards.${key}.applies`),
      text: one(`hazards.${key}.text`),
    })),
    related: postedRows('related', form, one),
    points: postedRows('points', form, one),
    tests: postedRows('tests', form, one),
    contacts: postedRows('contacts', form, one),
  }
}

/** Rows that were sent, in the order of their numbers, which may have gaps. */
function postedRows<Kind extends RowKind>(
  kind: Kind,
  form: FormData,
  one: (name: string) => string,
): PermitFormValues[Kind] {
  const sent = new Set<number>()
  for (const name of form.keys()) {
    const index = name.startsWith(`${kind}.`) ? /^\d{1,3}(?=\.)/.exec(name.slice(kind.length + 1)) : null
    if (index !== null) sent.add(Number(index[0]))
  }
  const rows = [...sent]
    .sort((a, b) => a - b)
    .map((index) =>
      Object.fromEntries(
        Object.keys(BLANK_ROWS[kind]).map((field) => [field, one(`${kind}.${index}.${field}`)]),
      ),
    )
  return rows as unknown as PermitFormValues[Kind]
}

/** A row to be filled in. A new point gets the next free tag. */
export function blankRow<Kind extends RowKind>(
  kind: Kind,
  values: Pick<PermitFormValues, 'segment' | 'points'>,
): PermitFormValues[Kind][number] {
  const row = { ...BLANK_ROWS[kind] } as PermitFormValues[Kind][number]
  return kind === 'points' ? { ...row, tag: nextPointTag(values) } : row
}

function nextPointTag({ segment, points }: Pick<PermitFormValues, 'segment' | 'points'>): string {
  const stem = `IP-${segment.replace(/^[A-Z]+-/i, '') || '1'}-`
  const taken = new Set(points.map(({ tag }) => tag.trim()))
  let number = points.length + 1
  while (taken.has(`${stem}${number}`)) number += 1
  return `${stem}${number}`
}

/** Does what a button of a list asks for: `add:points`, or `remove:points:2`. Null where the button is another one. */
export function withRowsChanged(values: PermitFormValues, button: string): PermitFormValues | null {
  const asked = /^(add|remove):(related|points|tests|contacts)(?::(\d{1,3}))?$/.exec(button)
  if (asked === null) return null
  const kind = asked[2] as RowKind
  if (asked[1] === 'remove') {
    return { ...values, [kind]: values[kind].filter((_, index) => index !== Number(asked[3])) }
  }
  if (values[kind].length >= MOST_ROWS[kind]) return values
  return { ...values, [kind]: [...values[kind], blankRow(kind, values)] }
}

export interface MergedValues {
  values: PermitFormValues
  /** Fields that both changed, each in another way: those of the form stand. */
  both: (keyof PermitFormValues)[]
}

/**
 * Puts what somebody typed and what somebody else saved meanwhile together, field by field: who changed a field has it.
 * Lists and answers to hazards count as one field each.
 *
 * @param base what both began with
 */
export function mergedValues(
  base: PermitFormValues,
  typed: PermitFormValues,
  saved: PermitFormValues,
): MergedValues {
  const values = { ...typed }
  const both: MergedValues['both'] = []
  const take = <Key extends keyof PermitFormValues>(key: Key) => {
    if (same(typed[key], base[key])) values[key] = saved[key]
    else if (!same(saved[key], base[key]) && !same(typed[key], saved[key])) both.push(key)
  }
  for (const key of Object.keys(typed) as (keyof PermitFormValues)[]) take(key)
  return { values, both }
}

/** Whether two fields hold the same text, but for space at the ends and how a browser ends its lines. */
function same(one: unknown, other: unknown): boolean {
  const plain = (_key: string, value: unknown) =>
    typeof value === 'string' ? value.replaceAll('\r\n', '\n').trim() : value
  return JSON.stringify(one, plain) === JSON.stringify(other, plain)
}
