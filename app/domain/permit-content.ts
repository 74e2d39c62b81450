/**
 * What a heated-segment permit says: one value with a version, edited as a whole. Everything may be missing while it
 * is a draft; what is still missing for a request is told by domain/permit-completeness.ts. Lengths in metres,
 * temperatures in °C, times as UTC ISO 8601.
 */
import { z } from 'zod'
import { HAZARD_KEYS, PERMIT_TEST_KINDS, POINT_PURPOSES } from './permit-words.ts'

const line = z.string().trim().max(200)
const lines = z.string().trim().max(4000)
const metres = z.number().min(0).max(100_000)
const personId = z.number().int().positive()
const instant = z.iso.datetime()

/** A permit is refused its window above this: 240 elapsed hours. */
export const LONGEST_WINDOW_HOURS = 240
/** Current validity of attended work, hours from its revalidation. */
export const ATTENDED_HOURS = 12
/** Current validity where an annex covers unattended soaking, hours. */
export const UNATTENDED_HOURS = 24

export const RelatedPaperSchema = z.object({
  kind: z.enum(['electrical', 'confined-space', 'hot-work', 'lifting', 'isolation-record', 'other']),
  number: line.min(1),
})

export const PlannedPointSchema = z.object({
  /** Unique within the permit, for example IP-05-1. */
  tag: z.string().trim().min(1).max(20),
  isolates: line.min(1),
  /** The position or condition that is required. */
  required: line.min(1),
  purpose: z.enum(POINT_PURPOSES),
  /** Whose keys go to the permit's lock box. */
  boxed: z.boolean(),
})
export type PlannedPoint = z.infer<typeof PlannedPointSchema>

export const RequiredTestSchema = z.object({
  kind: z.enum(PERMIT_TEST_KINDS),
  /** Where it is taken. */
  place: line,
  /** The result counts from and up to these; null where there is no such end. */
  low: z.number().nullable(),
  high: z.number().nullable(),
  unit: z.string().trim().max(16),
  /** Due again so many hours after the last; null for once before the permit is accepted. */
  everyHours: z.number().positive().max(240).nullable(),
})
export type RequiredTest = z.infer<typeof RequiredTestSchema>

const HazardAnswerSchema = z.object({
  /** Null until the requester has answered. */
  applies: z.boolean().nullable(),
  /** The precautions at this segment; or, where the hazard does not apply, why not. */
  text: lines,
})

export const PermitContentSchema = z.object({
  title: line,
  related: z.array(RelatedPaperSchema).max(20),
  /** The bake plan it was drawn up from, and that plan's version. */
  planId: z.number().int().positive().nullable(),
  planVersion: z.number().int().positive().nullable(),

  segments: z.array(z.string().trim().min(1).max(12)).max(2),
  fromM: metres.nullable(),
  toM: metres.nullable(),
  bays: line,
  exclusionWestM: metres.nullable(),
  exclusionEastM: metres.nullable(),
  equipment: z.array(z.string().trim().min(1).max(30)).max(40),

  work: lines,
  notIncluded: lines,
  maxCelsius: z.number().min(20).max(400).nullable(),
  rampKH: z.number().positive().max(60).nullable(),
  soakHours: z.number().min(0).max(2000).nullable(),
  supply: z.string().trim().max(12).nullable(),
  maxAmps: z.number().min(0).max(20_000).nullable(),
  maxVolts: z.number().min(0).max(1000).nullable(),
  openCircuitVolts: z.number().min(0).max(1000).nullable(),
  earthing: line,
  /** Whether heating goes on with nobody at the segment. */
  unattended: z.boolean().nullable(),
  nightCover: line,
  /** Needed for unattended heating. */
  annex: z.object({
    alarms: lines,
    onCallMinutes: z.number().positive().max(600).nullable(),
    shutOff: lines,
  }),

  holderId: personId.nullable(),
  deputyIds: z.array(personId).max(6),
  crewIds: z.array(personId).max(20),
  isolatingPersonId: personId.nullable(),
  electricianId: personId.nullable(),
  attendantId: personId.nullable(),

  from: instant.nullable(),
  to: instant.nullable(),
  shifts: line,

  hazards: z.partialRecord(z.enum(HAZARD_KEYS), HazardAnswerSchema),
  points: z.array(PlannedPointSchema).max(40),
  tests: z.array(RequiredTestSchema).max(30),

  protectiveEquipment: lines,
  barriers: lines,
  signs: lines,
  lighting: lines,
  rescue: lines,
  assemblyPoint: line,
  contacts: z.array(z.object({ role: line.min(1), name: line, phone: line.min(1) })).max(12),
})
/** See the fields above for units. */
export type PermitContent = z.infer<typeof PermitContentSchema>

/** Nothing said yet: nothing is ticked, nothing assumed. */
export function emptyPermitContent(): PermitContent {
  return {
    title: '',
    related: [],
    planId: null,
    planVersion: null,
    segments: [],
    fromM: null,
    toM: null,
    bays: '',
    exclusionWestM: null,
    exclusionEastM: null,
    equipment: [],
    work: '',
    notIncluded: '',
    maxCelsius: null,
    rampKH: null,
    soakHours: null,
    supply: null,
    maxAmps: null,
    maxVolts: null,
    openCircuitVolts: null,
    earthing: '',
    unattended: null,
    nightCover: '',
    annex: { alarms: '', onCallMinutes: null, shutOff: '' },
    holderId: null,
    deputyIds: [],
    crewIds: [],
    isolatingPersonId: null,
    electricianId: null,
    attendantId: null,
    from: null,
    to: null,
    shifts: '',
    hazards: {},
    points: [],
    tests: [],
    protectiveEquipment: '',
    barriers: '',
    signs: '',
    lighting: '',
    rescue: '',
    assemblyPoint: '',
    contacts: [],
  }
}
