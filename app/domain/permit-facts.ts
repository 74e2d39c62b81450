/** What is known about a permit when somebody wants to do something to it. The rules read this and nothing else. */
import type { PermitContent } from './permit-content.ts'
import type { HazardKey, PermitAct, PermitSection, PermitState, PermitTestKind } from './permit-words.ts'

/** Something that a section of the form still lacks for a request. */
export interface MissingPart {
  section: PermitSection
  /** Name of the field in the content, for a link to it. */
  field: string
  text: string
}

/** A caution that rests on a threshold which this site has not adopted, or has let lapse. */
export interface UnadoptedThreshold {
  hazard: HazardKey
  threshold: string
  text: string
}

/** Something about the tube that the records have to show before it is baked, and do not. */
export interface UnpreparedTube {
  /** For example `isolation-test-SG-11`. */
  key: string
  /** What is lacking, why what there is does not count, and the way out. */
  text: string
}

export const CONFLICT_RULES = [
  'K1',
  'K2',
  'K3',
  'K4',
  'K5',
  'K6',
  'K7',
  'K8',
  'K9',
  'K10',
  'K11',
  'K12',
] as const
export type ConflictRule = (typeof CONFLICT_RULES)[number]

/** Block: cannot be approved as it is. Ruling: an officer decides. Warning: is to be known. */
export type ConflictEffect = 'block' | 'ruling' | 'warning'

export interface ConflictFact {
  /** Rule and what it met, for example `K3:work:12`: the same while the conflict is the same. */
  key: string
  rule: ConflictRule
  effect: ConflictEffect
  /** What was found, with figures and times. */
  text: string
  /** How it can be cleared. */
  wayOut: string
  /** Stretch of the line that it concerns, metres; null where it has no place. */
  place: { line: string; fromM: number; toM: number } | null
  /** The officer's last ruling; `stale` when the facts have changed since. */
  ruling: { allowed: boolean; stale: boolean; text: string; by: string; at: Date } | null
}

/** One isolation point of the permit with the lock that hangs there, if any. */
export interface PointFact {
  tag: string
  lockNumber: string | null
  appliedBy: number | null
  verifiedBy: number | null
  /** Applied and verified, and not removed. */
  holds: boolean
  removed: boolean
}

export interface TestFact {
  kind: PermitTestKind
  place: string
  /** `overdue`: good, but due again since. */
  state: 'missing' | 'failed' | 'overdue' | 'good'
  /** When the result that counts was taken; null while there is none. Work that was stopped goes on after newer ones. */
  takenAt: Date | null
  nextDueAt: Date | null
  text: string
}

/** Whether the heating of the permit's segments is energised. `on` is null where nobody knows. */
export interface HeatingFact {
  on: boolean | null
  /** When that was last known, and since when it has been so as far as is known. */
  knownAt: Date | null
  since: Date | null
  /** From a supply's readings or from what a person said. */
  basis: 'supply' | 'person' | 'nothing'
  text: string
}

export interface PermitPolicy {
  extensionAllowed: boolean
  /** Days for which records of ended permits are kept at least. */
  keepDays: number
}

export interface PermitFacts {
  permit: {
    number: string
    state: PermitState
    revision: number
    version: number
    approvedVersion: number | null
    createdBy: number
    requestedBy: number | null
    approvedBy: number | null
    holderId: number | null
    windowFrom: Date | null
    windowTo: Date | null
    currentUntil: Date | null
    extensions: number
    extendedHours: number
    content: PermitContent
    approvedContent: PermitContent | null
  }
  /** Everything done so far, in order. */
  acts: readonly {
    act: PermitAct
    toState: PermitState
    personId: number | null
    at: Date
    detail: unknown
  }[]
  /** Everybody who wrote a version of the bake plan it rests on. */
  plannerIds: readonly number[]
  missing: readonly MissingPart[]
  unadopted: readonly UnadoptedThreshold[]
  /** What the records lack of the tube that is to be baked; empty where the permit rests on no bake plan. */
  unprepared: readonly UnpreparedTube[]
  conflicts: readonly ConflictFact[]
  points: readonly PointFact[]
  /** Locks that still hang for this permit, personal locks on its box included. */
  locksOut: readonly string[]
  tests: readonly TestFact[]
  heating: HeatingFact
  policy: PermitPolicy
}

/** Who wants to act. Grants count with the time since which they are in force. */
export interface PermitActor {
  personId: number
  /** Whether the person may do the acts of those who draft, and of those who approve. */
  mayDraft: boolean
  mayApprove: boolean
  /** When the approving role was confirmed by a second person; null without such a role. */
  approvingSince: Date | null
}
