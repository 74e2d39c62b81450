/** Kinds of thing in the register, and the one schema a kind that its form is checked by in the browser and on the server. */
import { z } from 'zod'
import type { Permission } from '../roles.ts'
import { siteInstant } from './instant.ts'
import {
  CIRCUIT_FIELDS,
  type FieldFact,
  INSTRUMENT_FIELDS,
  POSITION_FIELDS,
  PUMP_FIELDS,
  SEGMENT_FIELDS,
  SOURCE_FIELDS,
  SUPPLY_FIELDS,
  VALVE_FIELDS,
} from './register-fields.ts'
import { type FieldValue, tagValue } from './register-values.ts'

export const REGISTER_KINDS = [
  'segments',
  'positions',
  'instruments',
  'channels',
  'pumps',
  'valves',
  'circuits',
  'supply-sets',
  'sources',
  'limits',
  'equipment',
] as const
export type RegisterKind = (typeof REGISTER_KINDS)[number]

/** Kinds whose facts stand in one row and are edited by a form. The others are dated rows, or only looked at. */
export const EDITED_KINDS = [
  'segments',
  'positions',
  'instruments',
  'pumps',
  'valves',
  'circuits',
  'supply-sets',
  'sources',
] as const satisfies readonly RegisterKind[]
export type EditedKind = (typeof EDITED_KINDS)[number]

export interface KindFacts {
  /** Heading of the list. */
  title: string
  /** One of them, in the middle of a sentence. */
  one: string
  /** What the record calls it. */
  subject: string
  about: string
  fields: readonly FieldFact[]
  /** How the name of a new one is asked for; null where none is added by form. */
  tag: { label: string; max: number; example: string } | null
  /** What somebody needs to change it; null where nobody does here. */
  permission: Permission | null
}

const EDIT = { permission: 'register:edit' } as const

export const KIND_FACTS: Record<RegisterKind, KindFacts> = {
  segments: {
    title: 'Segments',
    one: 'segment',
    subject: 'segment',
    about: 'Lengths of tube between two gate valves: geometry, steel, what the wall holds.',
    fields: SEGMENT_FIELDS,
    tag: null,
    ...EDIT,
  },
  positions: {
    title: 'Positions',
    one: 'position',
    subject: 'position',
    about: 'Places where something is measured. A position stays when its instrument is exchanged.',
    fields: POSITION_FIELDS,
    tag: { label: 'Tag', max: 20, example: 'HC-03B' },
    ...EDIT,
  },
  instruments: {
    title: 'Instruments',
    one: 'instrument',
    subject: 'instrument',
    about: 'Physical instruments by serial number, with range and calibration.',
    fields: INSTRUMENT_FIELDS,
    tag: { label: 'Serial number', max: 40, example: 'Q-8120' },
    ...EDIT,
  },
  channels: {
    title: 'Channels',
    one: 'channel',
    subject: 'channel',
    about: 'Raw channels as the loggers name them, and which position each belongs to from when to when.',
    fields: [],
    tag: null,
    ...EDIT,
  },
  pumps: {
    title: 'Pumps',
    one: 'pump',
    subject: 'pump',
    about: 'Fixed pumps and carts: speed by gas at the tube, and where each has worked.',
    fields: PUMP_FIELDS,
    tag: { label: 'Tag', max: 12, example: 'MC-E' },
    ...EDIT,
  },
  valves: {
    title: 'Valves',
    one: 'valve',
    subject: 'valve',
    about: 'Gate, pump-port and vent valves with the temperature their seals stand.',
    fields: VALVE_FIELDS,
    tag: null,
    ...EDIT,
  },
  circuits: {
    title: 'Heater circuits',
    one: 'heater circuit',
    subject: 'heater-circuit',
    about:
      'The tube itself under direct current, and blanket heaters; with the supply sets that feed the tube.',
    fields: CIRCUIT_FIELDS,
    tag: { label: 'Tag', max: 12, example: 'BH-17' },
    ...EDIT,
  },
  'supply-sets': {
    title: 'Supply sets',
    one: 'supply set',
    subject: 'supply-set',
    about: 'Direct-current sets and what they can give.',
    fields: SUPPLY_FIELDS,
    tag: { label: 'Tag', max: 12, example: 'HX-4' },
    ...EDIT,
  },
  sources: {
    title: 'Sources',
    one: 'source',
    subject: 'source',
    about: 'Loggers that deliver files, when their files are due and how they are read.',
    fields: SOURCE_FIELDS,
    tag: { label: 'Code', max: 20, example: 'NL-S' },
    ...EDIT,
  },
  limits: {
    title: 'Limits and targets',
    one: 'limit',
    subject: 'limit',
    about: 'Every limit and target with its dates and the reason for it.',
    fields: [],
    tag: null,
    permission: 'limit:edit',
  },
  equipment: {
    title: 'Other equipment',
    one: 'piece of equipment',
    subject: 'equipment',
    about: 'Leak detectors, analysers and monitors that are looked up here and not edited.',
    fields: [],
    tag: null,
    permission: null,
  },
}

export function isRegisterKind(text: string): text is RegisterKind {
  return (REGISTER_KINDS as readonly string[]).includes(text)
}

export function isEditedKind(kind: RegisterKind): kind is EditedKind {
  return (EDITED_KINDS as readonly RegisterKind[]).includes(kind)
}

/** Why something is changed: asked for with every change. */
export const ReasonSchema = z
  .string({ error: 'Say in a few words why.' })
  .trim()
  .min(5, 'Say in a few words why.')
  .max(500, 'At most 500 characters.')

export interface EditedValues {
  values: Record<string, FieldValue>
  /** Revision the form was made for; 0 for a new thing. */
  revision: number
  validFrom: Date
  reason: string
  /** Name of a new thing; empty for one that is there already. */
  tag: string
}

/** The form that edits, or with `isNew` adds, one thing of a kind. */
export function editedSchema(kind: EditedKind, zone: string, isNew = false) {
  const facts = KIND_FACTS[kind]
  const shape: Record<string, z.ZodType<FieldValue>> = {}
  for (const field of facts.fields) shape[field.name] = field.schema(zone)
  const tag =
    isNew && facts.tag !== null ? tagValue(facts.tag.max, facts.tag.example) : z.literal('').default('')
  return z
    .object({
      ...shape,
      tag,
      revision: z.coerce.number().int().min(0).default(0),
      validFrom: siteInstant(zone),
      reason: ReasonSchema,
    })
    .superRefine((form, context) => {
      for (const [path, message] of crossFaults(kind, form as Record<string, FieldValue>)) {
        context.addIssue({ code: 'custom', path: [path], message })
      }
    })
    .transform((form): EditedValues => {
      const { tag: name, revision, validFrom, reason, ...values } = form
      return { values: values as Record<string, FieldValue>, tag: name, revision, validFrom, reason }
    })
}

/** Faults between fields that each look right by themselves. */
function* crossFaults(kind: EditedKind, form: Record<string, FieldValue>): Generator<[string, string]> {
  const number = (name: string): number | null => (typeof form[name] === 'number' ? form[name] : null)
  const [start, end] = [number('startM'), number('endM')]
  if (kind === 'segments') {
    if (start !== null && end !== null && end <= start) {
      yield ['endM', `The segment ends at ${end} m, before or where it starts (${start} m).`]
    }
    if (form.hydrogenModel === 'diffusion' && number('hydrogenC0') === null) {
      yield ['hydrogenC0', 'The diffusion model needs the mobile hydrogen in the wall, such as 7e23.']
    }
    if (form.hydrogenModel === 'low-hydrogen' && number('hydrogenQ20') === null) {
      yield ['hydrogenQ20', 'The low-hydrogen model needs the outgassing at 20 °C, such as 4e-10.']
    }
  }
  const [low, high] = [number('rangeMin'), number('rangeMax')]
  if (kind === 'instruments' && low !== null && high !== null && high <= low) {
    yield ['rangeMax', `The range ends at ${high}, before or where it begins (${low}).`]
  }
  const [maxVolts, open] = [number('maxVolts'), number('openCircuitVolts')]
  if (kind === 'supply-sets' && maxVolts !== null && open !== null && open < maxVolts) {
    yield [
      'openCircuitVolts',
      `A set gives no more under load (${maxVolts} V) than with its circuit open (${open} V).`,
    ]
  }
}
