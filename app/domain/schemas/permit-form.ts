/**
 * The permit form: what its fields hold as text, and the content that they make. One schema for the form in the browser
 * and for the action. Rows that were left blank are no rows; everything may be missing, nothing may be unreadable.
 */
import { z } from 'zod'
import {
  LONGEST_WINDOW_HOURS,
  type PermitContent,
  PermitContentSchema,
  RelatedPaperSchema,
} from '../permit-content.ts'
import { HAZARD_KEYS, type HazardKey, PERMIT_TEST_KINDS, POINT_PURPOSES } from '../permit-words.ts'
import { figure, peopleChoice, personChoice, text, windowEnd, yesNo } from './permit-form-fields.ts'

const HOUR_MS = 3_600_000

const ROW_KINDS = ['related', 'points', 'tests', 'contacts'] as const
/** Lists of the form to which rows are added. */
export type RowKind = (typeof ROW_KINDS)[number]

/** Rows that fit into each list. */
export const MOST_ROWS: Record<RowKind, number> = { related: 20, points: 40, tests: 30, contacts: 12 }

export const RELATED_KINDS = RelatedPaperSchema.shape.kind.options

/** A field that a row cannot do without. */
function needed(most: number, message: string) {
  return text(most).refine((typed) => typed !== '', message)
}

const line = () => text(200)
const lines = () => text(4000)
const metres = () => figure({ low: 0, high: 100_000, unit: 'm' })
const plain = z.string().default('')

/** A row whose fields were all left empty is null, whatever its choices stand at. */
function row<Shape extends z.ZodRawShape>(shape: Shape, typedFields: readonly (keyof Shape & string)[]) {
  const full = z.object(shape)
  return z.record(z.string(), z.unknown()).transform((given, context): z.output<typeof full> | null => {
    const blank = typedFields.every((name) => String(given[name] ?? '').trim() === '')
    if (blank) return null
    const read = full.safeParse(given)
    if (read.success) return read.data
    for (const { path, message } of read.error.issues) context.addIssue({ code: 'custom', path, message })
    return z.NEVER
  })
}

function rows<Row>(kind: RowKind, one: z.ZodType<Row | null>) {
  return z.array(one).max(MOST_ROWS[kind], `At most ${MOST_ROWS[kind]} rows fit here.`).default([])
}

const related = row(
  {
    kind: z.enum(RELATED_KINDS, 'Choose what kind of paper it is.'),
    number: needed(200, 'Give the number of the paper, or take the row out.'),
  },
  ['number'],
)

const point = row(
  {
    tag: needed(20, 'Give the point a tag, such as IP-05-1.'),
    isolates: needed(200, 'Say what is isolated here, such as NV-05, vent valve.'),
    required: needed(200, 'Say the position that is required, such as shut and locked.'),
    purpose: z.enum(POINT_PURPOSES, 'Choose why it is isolated.'),
    boxed: z
      .enum(['yes', 'no'], 'Say whether its key goes to the lock box.')
      .transform((typed) => typed === 'yes'),
  },
  ['isolates', 'required'],
)

const limit = () => figure({ low: -Infinity, high: Infinity, unit: '' })

const test = row(
  {
    kind: z.enum(PERMIT_TEST_KINDS, 'Choose a test.'),
    place: line(),
    low: limit(),
    high: limit(),
    unit: text(16),
    everyHours: figure({ low: 0, high: 240, unit: 'h', above: true }),
  },
  ['kind', 'place', 'low', 'high', 'unit', 'everyHours'],
)

const contact = row(
  {
    role: needed(200, 'Say who answers there, such as control room.'),
    name: line(),
    phone: needed(200, 'Give the number to call.'),
  },
  ['role', 'name', 'phone'],
)

const hazard = z.object({ applies: yesNo(), text: lines() })

const hazards = z
  .object(
    Object.fromEntries(HAZARD_KEYS.map((key) => [key, hazard.optional()])) as Record<
      HazardKey,
      z.ZodOptional<typeof hazard>
    >,
  )
  .default({})
  .transform((answers) => {
    const answered = HAZARD_KEYS.flatMap((key) => {
      const answer = answers[key]
      return answer === undefined || (answer.applies === null && answer.text === '') ? [] : [[key, answer]]
    })
    return Object.fromEntries(answered) as PermitContent['hazards']
  })

const equipment = plain.transform((typed, context): string[] => {
  const tags = [...new Set(typed.split(/[\n,;]/).map((tag) => tag.trim()))].filter((tag) => tag !== '')
  const long = tags.find((tag) => tag.length > 30)
  if (long !== undefined || tags.length > 40) {
    const message =
      long === undefined
        ? `These are ${tags.length} tags and at most 40 fit.`
        : `"${long}" is longer than a tag (30 characters). Put a comma or a new line between tags.`
    context.addIssue({ code: 'custom', message })
    return z.NEVER
  }
  return tags
})

const planNumber = plain.transform((typed) => (/^[1-9]\d{0,8}$/.test(typed) ? Number(typed) : null))
const choice = (most: number) => text(most).transform((typed) => (typed === '' ? null : typed))

function fields(zone: string) {
  return z.object({
    title: line(),
    related: rows('related', related),
    planId: planNumber,
    planVersion: planNumber,

    segment: text(12),
    second: text(12),
    fromM: metres(),
    toM: metres(),
    bays: line(),
    exclusionWestM: metres(),
    exclusionEastM: metres(),
    equipment,

    work: lines(),
    notIncluded: lines(),
    maxCelsius: figure({ low: 20, high: 400, unit: '°C' }),
    rampKH: figure({ low: 0, high: 60, unit: '°C/h', above: true }),
    soakHours: figure({ low: 0, high: 2000, unit: 'h' }),
    supply: choice(12),
    maxAmps: figure({ low: 0, high: 20_000, unit: 'A' }),
    maxVolts: figure({ low: 0, high: 1000, unit: 'V' }),
    openCircuitVolts: figure({ low: 0, high: 1000, unit: 'V' }),
    earthing: line(),
    unattended: yesNo(),
    nightCover: line(),
    annex: z
      .object({
        alarms: lines(),
        onCallMinutes: figure({ low: 0, high: 600, unit: 'min', above: true }),
        shutOff: lines(),
      })
      .default({ alarms: '', onCallMinutes: null, shutOff: '' }),

    holderId: personChoice(),
    deputyIds: peopleChoice(6),
    crewIds: peopleChoice(20),
    isolatingPersonId: personChoice(),
    electricianId: personChoice(),
    attendantId: personChoice(),

    from: windowEnd(zone),
    to: windowEnd(zone),
    shifts: line(),

    hazards,
    points: rows('points', point),
    tests: rows('tests', test),

    protectiveEquipment: lines(),
    barriers: lines(),
    signs: lines(),
    lighting: lines(),
    rescue: lines(),
    assemblyPoint: line(),
    contacts: rows('contacts', contact),
  })
}

type Fields = z.output<ReturnType<typeof fields>>

interface Fault {
  path: (string | number)[]
  message: string
}

/** What two fields together cannot say. */
function faultsBetween(form: Fields): Fault[] {
  return [...placeFaults(form), ...peopleFaults(form), ...windowFaults(form), ...rowFaults(form)]
}

function placeFaults({ segment, second, fromM, toM }: Fields): Fault[] {
  const faults: Fault[] = []
  if (second !== '' && segment === '') {
    faults.push({ path: ['segment'], message: `${second} is named as the second of a pair: name the first.` })
  }
  if (second !== '' && second === segment) {
    faults.push({ path: ['second'], message: `${second} is named twice. Name another segment, or none.` })
  }
  if (fromM !== null && toM !== null && toM <= fromM) {
    faults.push({
      path: ['toM'],
      message: `The stretch ends east of where it begins: give more than ${fromM} m.`,
    })
  }
  return faults
}

function peopleFaults({ holderId, deputyIds }: Fields): Fault[] {
  if (holderId === null || !deputyIds.includes(holderId)) return []
  return [{ path: ['deputyIds'], message: 'The holder cannot be their own deputy. Untick one of the two.' }]
}

function windowFaults({ from, to }: Fields): Fault[] {
  if (from === null || to === null) return []
  const hours = windowHours(from, to)
  if (hours <= 0) return [{ path: ['to'], message: 'The window ends before it begins. Give a later time.' }]
  if (hours <= LONGEST_WINDOW_HOURS) return []
  const message = `The window would be ${hoursText(hours)} long, and a permit covers at most ${LONGEST_WINDOW_HOURS} h as they pass. Shorten it, and let a second permit follow.`
  return [{ path: ['to'], message }]
}

function rowFaults({ points, tests }: Fields): Fault[] {
  const faults: Fault[] = []
  points.forEach((point, index) => {
    const tag = point?.tag.toUpperCase()
    if (point === null || points.findIndex((other) => other?.tag.toUpperCase() === tag) === index) return
    const message = `${point.tag} is the tag of another point. Give another.`
    faults.push({ path: ['points', index, 'tag'], message })
  })
  tests.forEach((test, index) => {
    if (test === null || test.low === null || test.high === null || test.high >= test.low) return
    faults.push({ path: ['tests', index, 'high'], message: `Give at least the lower limit, ${test.low}.` })
  })
  return faults
}

/** Hours that pass between two instants in UTC ISO 8601, whatever the clocks do. */
export function windowHours(from: string, to: string): number {
  return (Date.parse(to) - Date.parse(from)) / HOUR_MS
}

/** Hours with their minutes, such as `228 h` or `227 h 30 min`. */
export function hoursText(hours: number): string {
  const minutes = Math.round(hours * 60)
  const rest = minutes % 60
  return rest === 0 ? `${minutes / 60} h` : `${Math.floor(minutes / 60)} h ${rest} min`
}

function filled<Row>(all: readonly (Row | null)[]): Row[] {
  return all.filter((one) => one !== null)
}

/** @param zone the site's time zone, in which the window is typed */
export function permitFormSchema(zone: string) {
  return fields(zone).transform((form, context): PermitContent => {
    const faults = faultsBetween(form)
    for (const { path, message } of faults) context.addIssue({ code: 'custom', path, message })
    if (faults.length > 0) return z.NEVER
    const { segment, second, ...same } = form
    return PermitContentSchema.parse({
      ...same,
      segments: [segment, second].filter((tag) => tag !== ''),
      related: filled(form.related),
      points: filled(form.points),
      tests: filled(form.tests),
      contacts: filled(form.contacts),
    })
  })
}

const counter = z.coerce
  .number({ error: 'Load the page again: it does not say what it was filled from.' })
  .int()

/** What goes with the fields when the form is sent: the button, what the form was filled from, and the reason. */
export const PermitFormBasisSchema = z.object({
  intent: z.string().min(1, 'Press one of the buttons.').max(40),
  revision: counter,
  version: counter,
  reason: z.string().trim().max(1000).default(''),
})

/** What a new permit is made from: a link of a plan's chain, such as `7:1`, or a segment by hand. */
export const NewPermitSchema = z.discriminatedUnion(
  'from',
  [
    z.object({
      from: z.literal('plan'),
      link: z
        .string({ error: 'Choose the permit of the plan.' })
        .regex(/^[1-9]\d{0,8}:[1-9]\d{0,2}$/, 'Choose the permit of the plan.')
        .transform((typed) => {
          const [planId, number] = typed.split(':').map(Number) as [number, number]
          return { planId, number }
        }),
    }),
    z.object({
      from: z.literal('segment'),
      segment: needed(12, 'Choose a segment.'),
      second: text(12),
      celsius: figure({ low: 20, high: 400, unit: '°C' }),
      supply: choice(12),
    }),
  ],
  { error: 'Choose a bake plan or a segment to begin with.' },
)
