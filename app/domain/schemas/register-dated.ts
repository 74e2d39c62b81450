/** Forms that write a dated row: a channel's position, a position's instrument, a pump's place, a limit. */
import { z } from 'zod'
import { readOffset } from '../clock-correction.ts'
import { DomainError } from '../errors.ts'
import { siteInstant } from './instant.ts'
import { ReasonSchema } from './register.ts'
import { numberValue, optionalInstant } from './register-values.ts'

/** Number of the newest row the form was made for, so that a stale form is noticed; 0 where there was none. */
const seen = z.coerce.number().int().min(0)

/** An end, where given, lies after the beginning. */
function inOrder<Form extends { startsAt: Date; endsAt: Date | null }>(
  form: Form,
  context: z.RefinementCtx<Form>,
): void {
  if (form.endsAt === null || form.endsAt > form.startsAt) return
  context.addIssue({
    code: 'custom',
    path: ['endsAt'],
    message: 'The end lies before the beginning. Give a later time, or leave it empty.',
  })
}

/** From when a channel belongs to a position; an empty position takes the channel off every position. */
export function channelMapSchema(zone: string) {
  return z
    .object({
      seen,
      position: z.string().trim().max(20).default(''),
      startsAt: siteInstant(zone),
      endsAt: optionalInstant(zone),
      /** What becomes of another channel of the same source that the position belongs to: only asked when there is one. */
      other: z
        .enum(['', 'exchange', 'release'], { error: 'Choose what becomes of the other channel.' })
        .default(''),
      reason: ReasonSchema,
    })
    .superRefine(inOrder)
}

/** From when an instrument sits at a position; an empty serial number means that nothing sits there. */
export function fittingSchema(zone: string) {
  return z
    .object({
      seen,
      serial: z.string().trim().max(40).default(''),
      factor: numberValue({ min: 0.001, max: 1000, unit: '' }).transform((value) => value ?? 1),
      startsAt: siteInstant(zone),
      endsAt: optionalInstant(zone),
      reason: ReasonSchema,
    })
    .superRefine(inOrder)
}

/** From when a pump works at a place; an empty segment means that it stands idle. */
export function placementSchema(zone: string) {
  return z
    .object({
      seen,
      segment: z.string().trim().max(12).default(''),
      offsetM: numberValue({ min: 0, max: 100_000, unit: 'm', optional: true }),
      startsAt: siteInstant(zone),
      reason: ReasonSchema,
    })
    .superRefine((form, context) => {
      if (form.segment === '' || form.offsetM !== null) return
      context.addIssue({
        code: 'custom',
        path: ['offsetM'],
        message: "Give the metres from the segment's start.",
      })
    })
}

/** A limit from a time on; for a segment an empty value goes back to the one of the whole site. */
export function limitSchema(zone: string) {
  return z
    .object({
      seen,
      segment: z.string().trim().max(12).default(''),
      value: numberValue({ min: 0, max: 1e9, unit: '', optional: true }),
      startsAt: siteInstant(zone),
      reason: ReasonSchema,
    })
    .superRefine((form, context) => {
      if (form.segment !== '' || form.value !== null) return
      context.addIssue({
        code: 'custom',
        path: ['value'],
        message: 'Give a number such as 2e-7. Only a limit of one segment can be taken away.',
      })
    })
}

/** By how much a clock was behind true time; ahead of it with a minus. In milliseconds. */
const clockOffset = z
  .string({ error: 'Give the offset, such as 150 or -2:30.' })
  .transform((text, context): number => {
    try {
      return readOffset(text)
    } catch (error) {
      if (!(error instanceof DomainError)) throw error
      context.addIssue({ code: 'custom', message: error.message })
      return z.NEVER
    }
  })

/** How far a source's clock was off at both ends of a stretch, which is given by that clock. */
export function clockCorrectionSchema(zone: string) {
  return z
    .object({
      seen,
      startsAt: siteInstant(zone),
      endsAt: siteInstant(zone),
      startOffset: clockOffset,
      endOffset: clockOffset,
      reason: ReasonSchema,
    })
    .superRefine(inOrder)
}

export type ClockCorrectionForm = z.infer<ReturnType<typeof clockCorrectionSchema>>
export type ChannelMapForm = z.infer<ReturnType<typeof channelMapSchema>>
export type FittingForm = z.infer<ReturnType<typeof fittingSchema>>
export type PlacementForm = z.infer<ReturnType<typeof placementSchema>>
export type LimitForm = z.infer<ReturnType<typeof limitSchema>>
