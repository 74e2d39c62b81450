/** Work by others in the tunnel: what stands in its way, and what an officer may leave of it. */

import { metres, stretchText } from './permit-conflicts/words.ts'
import type { ConflictFact } from './permit-facts.ts'
import type { PlannedWorkKind, PlannedWorkState } from './permit-words.ts'
import { type Joint, overlaps, type Stretch, shared, zonesAround } from './tunnel-stretch.ts'

/** Kinds that say nothing without a place; the others may concern the whole site. */
export const PLACED_WORK: readonly PlannedWorkKind[] = [
  'leak-check',
  'vent',
  'opening',
  'entry',
  'lifting',
  'bay-work',
]

/** States in which a piece of work can still be changed, ruled on or begun. */
export const OPEN_WORK: readonly PlannedWorkState[] = ['planned', 'limited']

export const PLANNED_WORK_STATE_LABELS: Record<PlannedWorkState, string> = {
  planned: 'Planned',
  limited: 'Limited by an officer',
  refused: 'Refused',
  started: 'Under way',
  finished: 'Finished',
  'called-off': 'Called off',
}

/** Something that a piece of work would meet: a permit's conflict, or steel that is hot without one. */
export interface WorkClash {
  /** The permit whose rule it is; null where a segment is recorded as hot outside any permit's window. */
  permit: string | null
  rule: ConflictFact['rule']
  effect: ConflictFact['effect']
  text: string
  wayOut: string
  place: Stretch | null
  /** The officer's ruling on that permit that allows it, if it holds. */
  allowedBy: string | null
}

/** Whether a clash keeps the work from being begun. */
export function standsInTheWay({ effect, allowedBy }: WorkClash): boolean {
  return effect === 'block' || (effect === 'ruling' && allowedBy === null)
}

export interface HotSegment extends Stretch {
  tag: string
  /** State as it is recorded, in words. */
  stateLabel: string
}

/**
 * Where a stretch comes too close to segments that are recorded as hot, whatever their permits say. How hot they are
 * now is not known from that, so the exclusion counts until they are recorded as cold.
 */
export function hotNear(
  stretch: Stretch,
  hot: readonly HotSegment[],
  reachM: number,
  joints: readonly Joint[],
): WorkClash[] {
  return hot.flatMap((segment): WorkClash[] => {
    const zones = zonesAround(segment, { westM: reachM, eastM: reachM }, joints)
    const inside = zones.flatMap((zone) => shared(stretch, zone) ?? [])[0]
    if (inside === undefined) return []
    const onIt = overlaps(stretch, segment)
    return [
      {
        permit: null,
        rule: 'K3',
        effect: onIt ? 'block' : 'ruling',
        text: `${segment.tag} is recorded as “${segment.stateLabel}”. ${onIt ? 'The work is at the hot segment itself' : `The work comes within ${metres(reachM)} m of it`}: ${stretchText(inside)}.`,
        wayOut: `An officer limits the work to a stretch outside ${stretchText(inside)}, or it waits until ${segment.tag} is recorded as cold.`,
        place: inside,
        allowedBy: null,
      },
    ]
  })
}

/** Closed stretches that a piece of work would enter. One without a place is kept out by every closed stretch. */
export function closedOnTheWay<Closure extends Stretch>(
  stretch: Stretch | null,
  closures: readonly Closure[],
): Closure[] {
  return closures.filter((closure) => stretch === null || overlaps(stretch, closure))
}

/** What is wrong with a stretch that an officer would leave of a piece of work; null when it lies within. */
export function limitFault(asked: Stretch, left: { fromM: number; toM: number }): string | null {
  if (left.fromM >= left.toM) return 'The end lies before the beginning. Give the stretch from west to east.'
  if (left.fromM < asked.fromM || left.toM > asked.toM) {
    return `What is left lies within what was asked for: ${stretchText(asked)}. For another place the work is changed first.`
  }
  return null
}
