/** The form of a bake plan, as it is posted, and the content it makes. */
import { z } from 'zod'
import { type BakePlanContent, BakePlanContentSchema } from './bake-plan.ts'
import { TICKED_ITEM_KEYS } from './bake-plan-readiness.ts'
import { PLAN_PRIORITIES } from './planning.ts'
import { siteInstant } from './schemas/instant.ts'

function figure(low: number, high: number, unit: string) {
  return z
    .string()
    .trim()
    .transform((text, context): number => {
      const value = text === '' ? Number.NaN : Number(text.replace(',', '.'))
      if (Number.isFinite(value) && value >= low && value <= high) return value
      const found = text === '' ? 'Nothing was given.' : `"${text}" does not do.`
      context.addIssue({
        code: 'custom',
        message: `${found} Give a number from ${low} to ${high} ${unit}, such as ${example(low, high)}.`,
      })
      return z.NEVER
    })
}

function example(low: number, high: number): string {
  const middle = Math.sqrt(Math.max(low, 1e-12) * high)
  return middle < 0.01 ? middle.toExponential(0) : String(Math.round(middle))
}

// Not a union: its message would name neither what was found nor what was expected.
function orNothing<Value>(schema: z.ZodType<Value, string>) {
  return z.string().transform((text, context): Value | null => {
    if (text.trim() === '') return null
    const read = schema.safeParse(text)
    if (read.success) return read.data
    for (const { message } of read.error.issues) context.addIssue({ code: 'custom', message })
    return z.NEVER
  })
}

function optionalFigure(low: number, high: number, unit: string) {
  return orNothing(figure(low, high, unit))
}

const revision = z.coerce.number().int()
const reason = z.string().trim().min(5, 'Say why in a few words.').max(1000)
const password = z.string().min(1, 'Sign with your own password.')

/** Fields of the plan form as text. Times are in the site's zone. */
export function planFormSchema(zone: string) {
  return z
    .object({
      title: z.string().trim().min(3, 'Give the plan a name, such as "Bake of SG-05, November".').max(120),
      segment: z.string().trim().min(1, 'Choose a segment.').max(12),
      second: z.string().trim().max(12).default(''),
      startsAt: orNothing(siteInstant(zone)),
      prepHours: figure(0, 720, 'h'),
      celsius: figure(40, 300, '°C'),
      upKH: figure(0.5, 60, '°C/h'),
      holdPa: figure(1e-8, 10, 'Pa'),
      abortPa: optionalFigure(1e-8, 100, 'Pa'),
      spreadK: figure(1, 200, '°C'),
      soakHours: figure(0, 4000, 'h'),
      fallPercent: figure(0.1, 100, '%'),
      waterBehind: z.literal('on').optional(),
      cooling: z.enum(['natural', 'controlled'], { error: 'Choose how the tube cools.' }),
      downKH: optionalFigure(0.5, 60, '°C/h'),
      pumpChangeC: figure(20, 300, '°C'),
      coldC: figure(25, 80, '°C'),
      testHours: figure(0, 1000, 'h'),
      supply: z.string().trim().max(12).default(''),
      cart: z.string().trim().max(12).default(''),
      targetPa: figure(1e-10, 1, 'Pa'),
      remarks: z.string().trim().max(2000).default(''),
    })
    .transform((form, context): { title: string; content: BakePlanContent } => {
      if (form.cooling === 'controlled' && form.downKH === null) {
        context.addIssue({
          code: 'custom',
          path: ['downKH'],
          message: 'Held cooling needs a rate: give °C/h, or let the tube cool by itself.',
        })
        return z.NEVER
      }
      if (form.abortPa !== null && form.abortPa <= form.holdPa) {
        context.addIssue({
          code: 'custom',
          path: ['abortPa'],
          message: `Heating goes off at a higher pressure than the ramp waits at: give more than ${form.holdPa} Pa.`,
        })
        return z.NEVER
      }
      return { title: form.title, content: contentFrom(form) }
    })
}

interface PlanFields {
  segment: string
  second: string
  startsAt: Date | null
  prepHours: number
  celsius: number
  upKH: number
  holdPa: number
  abortPa: number | null
  spreadK: number
  soakHours: number
  fallPercent: number
  waterBehind?: 'on' | undefined
  cooling: 'natural' | 'controlled'
  downKH: number | null
  pumpChangeC: number
  coldC: number
  testHours: number
  supply: string
  cart: string
  targetPa: number
  remarks: string
}

function contentFrom(form: PlanFields): BakePlanContent {
  const { segment, second, startsAt, fallPercent, waterBehind, cooling, downKH, supply, cart, ...same } = form
  return BakePlanContentSchema.parse({
    ...same,
    segments: second === '' ? [segment] : [segment, second],
    startsAt: startsAt === null ? null : startsAt.toISOString(),
    soakEnd: { fallPercent, waterBehind: waterBehind === 'on' },
    cooling: cooling === 'controlled' ? { kind: 'controlled', downKH } : { kind: 'natural' },
    supply: supply === '' ? null : supply,
    cart: cart === '' ? null : cart,
  })
}

/** What stands in the form at first, by field. */
export function planFormValues(
  title: string,
  content: BakePlanContent,
  written: (at: Date) => string,
): Record<string, string> {
  const { segments, startsAt, soakEnd, cooling, ...rest } = content
  return {
    title,
    segment: segments[0] ?? '',
    second: segments[1] ?? '',
    startsAt: startsAt === null ? '' : written(new Date(startsAt)),
    prepHours: String(rest.prepHours),
    celsius: String(rest.celsius),
    upKH: String(rest.upKH),
    holdPa: String(rest.holdPa),
    abortPa: rest.abortPa === null ? '' : String(rest.abortPa),
    spreadK: String(rest.spreadK),
    soakHours: String(rest.soakHours),
    fallPercent: String(soakEnd.fallPercent),
    ...(soakEnd.waterBehind ? { waterBehind: 'on' } : {}),
    cooling: cooling.kind,
    downKH: cooling.kind === 'controlled' ? String(cooling.downKH) : '',
    pumpChangeC: String(rest.pumpChangeC),
    coldC: String(rest.coldC),
    testHours: String(rest.testHours),
    supply: rest.supply ?? '',
    cart: rest.cart ?? '',
    targetPa: String(rest.targetPa),
    remarks: rest.remarks,
  }
}

/** What can be done on a plan's page, told apart by the button that was pressed. */
export const PlanActSchema = z.discriminatedUnion(
  'act',
  [
    z.object({ act: z.literal('sign'), revision, password }),
    z.object({ act: z.literal('withdraw'), revision, reason }),
    z.object({ act: z.literal('move-on'), revision, to: z.enum(['under-way', 'done']), reason }),
    z.object({ act: z.literal('priority'), revision, priority: z.enum(PLAN_PRIORITIES), reason }),
    z.object({
      act: z.literal('tick'),
      item: z.enum(TICKED_ITEM_KEYS as [(typeof TICKED_ITEM_KEYS)[number], ...typeof TICKED_ITEM_KEYS]),
      done: z.enum(['yes', 'no']).transform((text) => text === 'yes'),
      note: z.string().trim().max(500).default(''),
    }),
  ],
  { error: 'This page does not know that button. Load it again.' },
)

/** A new version says which one it was made from, and why. */
export const NewVersionSchema = z.object({ revision, reason })
