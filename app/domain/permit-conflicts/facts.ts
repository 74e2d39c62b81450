/** What the conflict rules look at. A service collects it; the rules themselves ask nobody. */
import type { BakedSegment } from '../bake-load.ts'
import type { ConflictFact } from '../permit-facts.ts'
import type { CompetenceKind, PermitState, PlannedWorkKind, PlannedWorkState } from '../permit-words.ts'
import type { Feeder } from '../register.ts'
import type { Roster } from '../schedule/rosters.ts'
import type { SegmentState } from '../segment-states.ts'
import type { Joint, Stretch } from '../tunnel-stretch.ts'

/** What a rule finds; an officer's ruling is attached by the service. */
export type Finding = Omit<ConflictFact, 'ruling'>

/** A segment with its place. */
export interface Place extends Stretch {
  tag: string
  state: SegmentState
}

/** The heat that a permit asks for. Temperatures in °C, rate in K/h. */
export interface Heat {
  segments: readonly BakedSegment[]
  celsius: number
  upKH: number
  /** Hours at temperature; null for the rest of the window. */
  holdHours: number | null
  /** When heating begins; null for the beginning of the window, because nothing says more. */
  startsAt: Date | null
  /** Whether direct current goes through the tube; otherwise only blankets draw power. */
  throughTube: boolean
}

export interface ConflictPermit {
  number: string
  state: PermitState
  segments: readonly Place[]
  from: Date | null
  to: Date | null
  maxCelsius: number | null
  exclusionWestM: number | null
  exclusionEastM: number | null
  holder: { id: number; name: string } | null
  supply: string | null
  cart: string | null
  equipment: readonly string[]
  /** The bake plan that it rests on, with the segments of that plan. */
  plan: { id: number; segments: readonly string[] } | null
  /** Numbers of the locks that hang for it. */
  locks: readonly string[]
  heat: Heat | null
}

/** A person with a part in a permit that takes a competence. */
export interface NeededCompetence {
  personId: number
  name: string
  kind: CompetenceKind
  /** What the person is on the permit, such as "deputy". */
  as: string
  /** Others named on the permit who may stand in with the same competence. */
  standIns: readonly { personId: number; name: string }[]
}

export interface OwnPermit extends ConflictPermit {
  points: readonly { tag: string; isolates: string; required: string; holds: boolean }[]
  needs: readonly NeededCompetence[]
}

export interface GateValve {
  tag: string
  west: string | null
  east: string | null
  line: string
  atM: number
  limitC: number
  /** Share of the tube's rise over its surroundings that the limited part reaches. */
  partRiseShare: number
}

/** Work by others, with the stretch that an officer has left of it where one has. */
export interface WorkFact {
  id: number
  kind: PlannedWorkKind
  title: string
  state: PlannedWorkState
  stretch: Stretch | null
  from: Date
  to: Date
  people: string
}

export interface CompetenceSpan {
  personId: number
  kind: CompetenceKind
  number: string
  from: Date
  /** First instant at which it no longer holds; null for good. */
  to: Date | null
}

export interface ConflictLimits {
  /** Metres of tunnel beyond hot steel that nobody enters, and from which temperature on; null where the register has none. */
  exclusionM: number | null
  exclusionC: number | null
  dayKW: number | null
  nightKW: number | null
  baseKW: number
  feederKW: Record<Feeder, number | null>
}

export interface ConflictFacts {
  now: Date
  zone: string
  ambientC: number
  own: OwnPermit
  /** Other permits that claim their segments. */
  others: readonly ConflictPermit[]
  /** Every segment of the register. */
  segments: readonly Place[]
  valves: readonly GateValve[]
  joints: readonly Joint[]
  works: readonly WorkFact[]
  limits: ConflictLimits
  /** Extraction fans of the bays. */
  fans: readonly { tag: string; line: string; atM: number }[]
  competences: readonly CompetenceSpan[]
  holidays: readonly { day: string; name: string }[]
  crews: readonly { code: string; roster: Roster; endsMs: number | null }[]
}

/** Reach of the exclusion where the register sets none (common practice, no source). */
const USUAL_EXCLUSION_M = 10
/** Steel colder than this needs no exclusion, where the register says nothing (common practice, no source). */
const USUAL_EXCLUSION_C = 60

/** How far the exclusion reaches past both ends: what the permit asks for, and never less than what the site asks for. */
export function exclusionReach(
  permit: Pick<ConflictPermit, 'exclusionWestM' | 'exclusionEastM'>,
  limits: Pick<ConflictLimits, 'exclusionM'>,
): { westM: number; eastM: number } {
  const least = limits.exclusionM ?? USUAL_EXCLUSION_M
  return {
    westM: Math.max(least, permit.exclusionWestM ?? 0),
    eastM: Math.max(least, permit.exclusionEastM ?? 0),
  }
}

/** Whether a permit's steel gets hot enough for an exclusion; unknown counts as hot. */
export function needsExclusion(
  { maxCelsius }: Pick<ConflictPermit, 'maxCelsius'>,
  { exclusionC }: Pick<ConflictLimits, 'exclusionC'>,
): boolean {
  return maxCelsius === null || maxCelsius > (exclusionC ?? USUAL_EXCLUSION_C)
}
