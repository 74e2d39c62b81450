/**
 * What stands against a permit from outside: other permits, work by others, power, people and the calendar. Rules K1 to
 * K12, each of which says what it found with figures and times, how that can be cleared, and where on the line it is.
 * Times may touch, and stretches may touch; neither is a conflict.
 */

import { calendarEvents } from './permit-conflicts/calendar.ts'
import { competencesMissing } from './permit-conflicts/competences.ts'
import type { ConflictFacts, Finding } from './permit-conflicts/facts.ts'
import { heatOnBothSides, sameHands, sameSegment, sharedUtilities } from './permit-conflicts/neighbours.ts'
import { powerOverCap } from './permit-conflicts/power.ts'
import {
  fireDetection,
  liftingOver,
  openingNextDoor,
  peopleNear,
  siteEvents,
  sprayNear,
} from './permit-conflicts/works.ts'
import { CONFLICT_RULES } from './permit-facts.ts'

const RULES: readonly ((facts: ConflictFacts) => Finding[])[] = [
  sameSegment,
  heatOnBothSides,
  peopleNear,
  openingNextDoor,
  powerOverCap,
  sharedUtilities,
  sameHands,
  competencesMissing,
  fireDetection,
  liftingOver,
  siteEvents,
  calendarEvents,
  sprayNear,
]

const GRAVITY = { block: 0, ruling: 1, warning: 2 } as const

/**
 * Everything that stands against a permit in what is left of its window, the gravest first. Empty without a window or
 * without segments: then there is nothing to compare yet.
 */
export function findConflicts(facts: ConflictFacts): Finding[] {
  if (facts.own.segments.length === 0) return []
  const found = new Map<string, Finding>()
  for (const rule of RULES)
    for (const finding of rule(facts)) found.set(finding.key, found.get(finding.key) ?? finding)
  return [...found.values()].sort(
    (a, b) =>
      GRAVITY[a.effect] - GRAVITY[b.effect] ||
      CONFLICT_RULES.indexOf(a.rule) - CONFLICT_RULES.indexOf(b.rule) ||
      (a.key < b.key ? -1 : 1),
  )
}
