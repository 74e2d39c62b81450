/** Adsorption sites of the wall of a meshed tube, prepared so that a solver pays one logarithm a node. */
import { GAS_CONSTANT } from './constants.ts'
import type { TubeMesh } from './tube.ts'
import { type WaterIsotherm, waterScalePressure } from './water.ts'

/** Sites of a part of the wall: their number and what the temperature makes of them, by zone and spread over nodes. */
export interface Sites {
  /** Sites times RT/(E1 - E0), and e^(E/RT)/p00 at the lowest and the highest energy, by node. */
  readonly scaled: Float64Array
  readonly low: Float64Array
  readonly high: Float64Array
  warm(zone: number, kelvin: number): void
  spread(zoneOf: Int32Array): void
}

/** The share of the wall that holds this isotherm; cold and empty until `warm` and `spread` are called. */
export function wallSites(isotherm: WaterIsotherm, mesh: TubeMesh, zones: number, share: number): Sites {
  const { count: n, wallM2 } = mesh
  const width = new Float64Array(zones)
  const zoneLow = new Float64Array(zones)
  const zoneHigh = new Float64Array(zones)
  const scaled = new Float64Array(n)
  const low = new Float64Array(n)
  const high = new Float64Array(n)
  return {
    scaled,
    low,
    high,
    warm(zone, kelvin) {
      const energy = GAS_CONSTANT * kelvin
      const logScale = Math.log(waterScalePressure(kelvin, isotherm))
      width[zone] = energy / (isotherm.highJMol - isotherm.lowJMol)
      zoneLow[zone] = Math.exp(isotherm.lowJMol / energy - logScale)
      zoneHigh[zone] = Math.exp(isotherm.highJMol / energy - logScale)
    },
    spread(zoneOf) {
      const each = share * isotherm.capacityPerM2
      for (let i = 0; i < n; i++) {
        const zone = zoneOf[i]!
        scaled[i] = each * wallM2[i]! * width[zone]!
        low[i] = zoneLow[zone]!
        high[i] = zoneHigh[zone]!
      }
    },
  }
}

/**
 * Adds the molecules on the wall in equilibrium with these pressures, and their slope, node by node.
 *
 * With a = p e^(E/RT)/p00 at both ends of the energies, coverage is the width times ln((1 + a1)/(1 + a0)): one
 * logarithm a node, written so that an almost empty wall loses no digits.
 */
export function addAdsorbed(
  wall: Sites,
  pressure: Float64Array,
  amount: Float64Array,
  slope: Float64Array,
): void {
  const { scaled, low, high } = wall
  for (let i = 0; i < scaled.length; i++) {
    const p = pressure[i]!
    const a0 = p * low[i]!
    const a1 = p * high[i]!
    const ratio = (a1 - a0) / (1 + a0)
    amount[i]! += scaled[i]! * Math.log1p(ratio)
    slope[i]! += (scaled[i]! * ratio) / ((1 + a1) * p)
  }
}
