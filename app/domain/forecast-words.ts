/** What holds a segment above a pressure, and what would lift it, in a sentence. Pure. */

import { powerText } from './power-text.ts'

/** Waiting longer than this is no plan, h. */
const PATIENCE_HOURS = 60 * 24

export type Binding = 'hydrogen' | 'constant-load' | 'water'

export interface BindingFacts {
  targetPa: number
  /** Hydrogen from the steel by the register's model, nitrogen-equivalent; null without a model. */
  hydrogenPa: number | null
  /** Constant part that the readings show; null where they show none. */
  constantPa: number | null
  /** Hours until the target at the earliest, if nothing constant comes in the way; null when unknown. */
  earliestHours: number | null
}

export interface BindingAnswer {
  binds: Binding
  /** How many times the pumping speed that would hold it at the target; null where speed is no cure. */
  speedTimes: number | null
  text: string
}

/** What stands between a segment and a pressure; null when nothing but time does. */
export function bindingOf(facts: BindingFacts): BindingAnswer | null {
  const { targetPa, hydrogenPa, constantPa, earliestHours } = facts
  if (hydrogenPa !== null && hydrogenPa >= targetPa) {
    return {
      binds: 'hydrogen',
      speedTimes: null,
      text: `Hydrogen out of the steel alone reads ${pa(hydrogenPa)} by the register's model, above ${pa(targetPa)}. Waiting does not lift that; a bake drives the hydrogen out.`,
    }
  }
  if (constantPa !== null && constantPa >= targetPa) {
    const known = hydrogenPa === null ? '' : ` The register's hydrogen explains ${pa(hydrogenPa)} of it.`
    return {
      binds: 'constant-load',
      speedTimes: constantPa / targetPa,
      text: `A constant load holds the gauge at ${pa(constantPa)}, above ${pa(targetPa)}.${known} Look for a leak and close it; while it stays, only ${(constantPa / targetPa).toFixed(1)} times the pumping speed would come down so far, and a bake would not help.`,
    }
  }
  if (earliestHours !== null && earliestHours > PATIENCE_HOURS) {
    return {
      binds: 'water',
      speedTimes: null,
      text: `Water on the wall binds: by pumping alone ${pa(targetPa)} takes at least ${Math.round(earliestHours / 24)} days. It cannot sensibly be reached without a bake.`,
    }
  }
  return null
}

function pa(value: number): string {
  return `${powerText(value, 2)} Pa`
}
