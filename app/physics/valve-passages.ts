/** Valves of a meshed tube in other than molecular flow: continuum and choked flow in place of the molecular one. */
import { type ApertureFlow, apertureFlow, apertureThroughput } from './conductance.ts'
import { BOLTZMANN } from './constants.ts'
import type { Gas } from './gases.ts'
import type { TreeMatrix } from './tree-matrix.ts'

export interface ValvePassages {
  clear(): void
  /** The passage of `node` to its parent is an open bore with gas of this temperature and viscosity. */
  open(node: number, gas: Gas, boreM: number, kelvin: number, viscosityPaS: number): void
  /** Replaces the molecular flow that rates and matrix already hold for these passages. */
  replaceFlow(pressure: Float64Array, rate: Float64Array, matrix: TreeMatrix, scale: number): void
}

/** Share of the pressure by which slopes are taken. */
const SLIGHTLY = 1e-6

export function valvePassages(): ValvePassages {
  const passages = new Map<number, { flow: ApertureFlow; moleculesPerPaM3: number }>()
  return {
    clear() {
      passages.clear()
    },
    open(node, gas, boreM, kelvin, viscosityPaS) {
      const flow = apertureFlow(gas, boreM, kelvin, viscosityPaS)
      passages.set(node, { flow, moleculesPerPaM3: 1 / (BOLTZMANN * kelvin) })
    },
    replaceFlow(pressure, rate, { parent, up, down }, scale) {
      for (const [node, { flow, moleculesPerPaM3 }] of passages) {
        const mine = pressure[node]!
        const theirs = pressure[parent[node]!]!
        // What continuum flow adds to the molecular flow: at low pressure nothing, whatever the temperatures.
        const more = moleculesPerPaM3 * added(flow, mine, theirs)
        rate[node]! -= more
        rate[parent[node]!]! += more
        up[node]! += scale * moleculesPerPaM3 * slope(flow, mine, theirs)
        down[node]! += scale * moleculesPerPaM3 * slope(flow, theirs, mine)
      }
    },
  }
}

function added(flow: ApertureFlow, fromPa: number, toPa: number): number {
  const whole =
    fromPa > toPa ? apertureThroughput(flow, fromPa, toPa) : -apertureThroughput(flow, toPa, fromPa)
  return whole - flow.molecular * (fromPa - toPa)
}

// Of `added` over the first pressure.
function slope(flow: ApertureFlow, fromPa: number, toPa: number): number {
  const step = SLIGHTLY * fromPa
  return (added(flow, fromPa + step, toPa) - added(flow, fromPa - step, toPa)) / (2 * step)
}
