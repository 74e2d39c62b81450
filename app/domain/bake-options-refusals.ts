/** Questions that have no answer: each is met with a sentence that names what binds and what would lift it. */
import { nitrogenEquivalent } from '../physics/gauges.ts'
import { airPressure, hydrogenRate, unitPressure } from '../physics/segment-gas.ts'
import { WATER_FLOOR_PA } from '../physics/water.ts'
import { pairObjection } from './bake-load.ts'
import { peakKW } from './bake-options-demands.ts'
import type { OptionQuestion, OptionSegment } from './bake-options-question.ts'
import { powerText } from './power-text.ts'

/** The sentence with which a question is refused as a whole; null where it can be asked. */
export function refusalOf(question: OptionQuestion): string | null {
  const { segments, targetPa, site, coolestC, hottestC } = question
  const [one, other, third] = segments
  if (one === undefined || third !== undefined) {
    return `Found ${segments.length} segments; a bake heats one, or two in series. Name one or two.`
  }
  if (!(targetPa > 0 && Number.isFinite(targetPa)))
    return `Found a target of ${targetPa} Pa; a pressure above zero is needed, such as 2e-7.`
  if (!(coolestC > site.ambientC && hottestC >= coolestC))
    return `Found ${coolestC} to ${hottestC} °C; the bake must be warmer than the surroundings (${site.ambientC} °C), and its range must rise.`
  const floorPa = nitrogenEquivalent({ H2O: WATER_FLOOR_PA })
  if (targetPa <= floorPa) {
    return `The target of ${pa(targetPa)} lies at or below the floor of ${pa(floorPa)}, under which nothing is known of the water that steel still gives off. A target above the floor can be answered.`
  }
  if (other !== undefined) {
    const objection = pairObjection(one.baked, other.baked)
    if (objection !== null) return objection
  }
  return (
    powerRefusal(question) ?? segments.map((segment) => floorRefusal(segment, targetPa)).find(isSaid) ?? null
  )
}

function isSaid(words: string | null): words is string {
  return words !== null
}

function powerRefusal({ segments, site, coolestC }: OptionQuestion): string | null {
  if (site.supplies.length === 0) {
    return 'The register has no supply set, so nothing can drive a current through the tube. Enter one under Register, Supply sets.'
  }
  const { dayKW, nightKW, baseKW } = site.caps
  const caps = [dayKW, nightKW].filter((cap) => cap !== null)
  const left = caps.length === 0 ? Number.POSITIVE_INFINITY : Math.max(...caps) - baseKW
  const least = peakKW(segments, site, coolestC)
  if (least <= left) return null
  return `No power is left for a bake: of the ${Math.max(...caps)} kW cap ${baseKW} kW are base load, which leaves ${left.toFixed(1)} kW; even ${coolestC} °C takes ${least.toFixed(1)} kW at the end of its ramp. A higher cap, less base load or a slower ramp would lift it.`
}

/** What no bake can lower: an air leak, and the hydrogen of steel fired in vacuum. */
function floorRefusal({ baked, hot, afterPumps, gauge }: OptionSegment, targetPa: number): string | null {
  const later = { ...hot, pumps: afterPumps }
  const leakPaM3S = (hot.airLeaks ?? []).reduce((sum, { qPaM3S }) => sum + qPaM3S, 0)
  const airPa = leakPaM3S === 0 ? 0 : airPressure(later, gauge.offsetM)
  if (airPa >= targetPa) {
    return `An air leak of ${powerText(leakPaM3S, 2)} Pa·m³/s holds ${gauge.tag} at ${pa(airPa)}, above the target of ${pa(targetPa)}: no bake of ${baked.tag} lowers that. Mending it to below ${powerText((leakPaM3S * targetPa) / airPa, 2)} Pa·m³/s, or pumping more air, would lift it.`
  }
  if (hot.hydrogen.kind !== 'low-hydrogen') return null
  const hydrogenPa = nitrogenEquivalent({
    H2: hydrogenRate(later, 0) * unitPressure(later, 'H2', gauge.offsetM),
  })
  if (hydrogenPa + airPa < targetPa) return null
  return `The fired steel of ${baked.tag} gives hydrogen that a bake hardly changes: it holds ${gauge.tag} at ${pa(hydrogenPa + airPa)}, above the target of ${pa(targetPa)}. ${((hydrogenPa + airPa) / targetPa).toFixed(1)} times the pumping speed for hydrogen, or a target above that reading, would lift it.`
}

function pa(value: number): string {
  return `${powerText(value, 2)} Pa`
}
