/**
 * One gas in a meshed tube: how much each node holds, how it flows between nodes, and what comes and goes. Amounts
 * are molecules, so that a changing wall temperature needs no terms of its own.
 *
 * Molecular flow follows the gradient of p/sqrt(T), which isothermally is Knudsen's long tube; transitional flow adds
 * Knudsen's slip factor and the laminar part.
 */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { slipPerPascal, viscousSpecific } from './conductance.ts'
import { BOLTZMANN, GAS_CONSTANT, T20_K } from './constants.ts'
import { PhysicsError } from './errors.ts'
import { type GasRun, stepAt, type ThermalState, type ValveMotion, wallRate } from './gas-run.ts'
import { moleculeMass, viscosity } from './gases.ts'
import { temperatureAt } from './programme.ts'
import { type PumpCurve, pumpThroughput, pumpThroughputSlope } from './pumps.ts'
import type { TreeMatrix } from './tree-matrix.ts'
import type { TubeMesh } from './tube.ts'
import { waterScalePressure } from './water.ts'

export interface GasBalance {
  /** Pressures do not enter storage or flow other than linearly. */
  readonly linear: boolean
  /** Take on the pumps, leaks and valves that hold from this time on. */
  enter(atS: number): void
  /** Temperatures, passages and sources at this time. */
  prepare(atS: number): void
  /** Molecules at each node, and their slope over pressure. */
  storage(pressure: Float64Array, amount: Float64Array, slope: Float64Array): void
  /** Net molecules per second into each node; adds -scale d(rate)/dp to the matrix. */
  flow(pressure: Float64Array, rate: Float64Array, matrix: TreeMatrix, scale: number): void
  /** Molecules per second brought in by wall and leaks at the prepared time. */
  sourceTotal(): number
  /** Molecules per second taken by the pumps at the prepared time. */
  pumpTotal(pressure: Float64Array): number
}

/** Sets up one gas on a mesh from `fromS` on. Throws on a node or valve that the mesh does not have. */
export function gasBalance(
  mesh: TubeMesh,
  thermal: ThermalState,
  valves: readonly ValveMotion[],
  run: GasRun,
  fromS: number,
): GasBalance {
  const { count: n, parent, passageDiameterM, passageLengthM, volumeM3, wallM2 } = mesh
  requireWithin('number of temperature programmes', thermal.programmes.length, 1, n)
  const zoneOf = thermal.zoneOfNode ?? new Int32Array(n)
  const zones = thermal.programmes.length
  const leaks = run.leaks ?? []
  for (const { node } of [...run.pumps, ...leaks]) requireWithin('node', node, 0, n - 1)
  const mass = moleculeMass(run.gas)
  const rootOfMass = Math.sqrt(2 * Math.PI * mass * BOLTZMANN)
  const transitional = run.flow === 'transitional'

  // Passage coefficient of molecular flow times sqrt(T): (4d/3)A/(L sqrt(2 pi m k)), or A/sqrt(2 pi m k) in a valve.
  const passage = new Float64Array(n)
  const shut = new Uint8Array(n)
  for (let i = 1; i < n; i++) {
    const d = passageDiameterM[i]!
    const opening =
      ((Math.PI * d * d) / 4) * (passageLengthM[i]! > 0 ? (4 * d) / (3 * passageLengthM[i]!) : 1)
    passage[i] = opening / rootOfMass
  }
  const fromNode = new Float64Array(n)
  const fromParent = new Float64Array(n)
  const viscous = new Float64Array(n)
  const slip = new Float64Array(n)
  const temperature = new Float64Array(n)
  const source = new Float64Array(n)
  const pumpCurve: (PumpCurve | null)[] = run.pumps.map(() => null)
  const pumpFactor = new Float64Array(run.pumps.length)
  const leakRate = new Float64Array(leaks.length)

  // Per zone: the wall's rate, and the isotherm's width and shifts of ln p at both ends of the energies.
  const zoneK = new Float64Array(zones)
  const zoneRate = new Float64Array(zones)
  const width = new Float64Array(zones)
  const lowShift = new Float64Array(zones)
  const highShift = new Float64Array(zones)
  const wallRates = thermal.programmes.map((programme) => wallRate(run.walls ?? [], programme, fromS))
  const isotherm = run.isotherm
  if (isotherm) requirePositive('capacityPerM2', isotherm.capacityPerM2)

  function prepareZone(zone: number, atS: number): void {
    const kelvin = temperatureAt(thermal.programmes[zone]!, atS)
    zoneK[zone] = kelvin
    zoneRate[zone] = wallRates[zone]!(atS, kelvin)
    if (!isotherm) return
    const energy = GAS_CONSTANT * kelvin
    const logScale = Math.log(waterScalePressure(kelvin, isotherm))
    width[zone] = energy / (isotherm.highJMol - isotherm.lowJMol)
    lowShift[zone] = isotherm.lowJMol / energy - logScale
    highShift[zone] = isotherm.highJMol / energy - logScale
  }

  return {
    linear:
      !isotherm &&
      !transitional &&
      run.pumps.every((p) =>
        p.curve.every((s) => s.value?.kind !== 'turbo' && s.value?.kind !== 'displacement'),
      ),

    enter(atS) {
      for (const [i, pump] of run.pumps.entries()) pumpCurve[i] = stepAt(pump.curve, atS, null)
      for (const [i, leak] of leaks.entries()) {
        leakRate[i] = stepAt(leak.loadPaM3S, atS, 0) / (BOLTZMANN * (leak.gasK ?? T20_K))
      }
      shut.fill(0)
      for (const valve of valves) {
        const node = mesh.valveNodes.get(valve.name)
        if (node === undefined)
          throw new PhysicsError(`valve ${valve.name}`, Number.NaN, 'a valve of the mesh')
        shut[node] = stepAt(valve.open, atS, true) ? 0 : 1
      }
    },

    prepare(atS) {
      for (let zone = 0; zone < zones; zone++) prepareZone(zone, atS)
      for (let i = 0; i < n; i++) {
        const zone = zoneOf[i]!
        temperature[i] = zoneK[zone]!
        source[i] = zoneRate[zone]! * wallM2[i]!
      }
      for (let i = 0; i < leaks.length; i++) source[leaks[i]!.node]! += leakRate[i]!
      for (let i = 1; i < n; i++) {
        const q = parent[i]!
        const open = shut[i] === 1 ? 0 : passage[i]!
        fromNode[i] = open / Math.sqrt(temperature[i]!)
        fromParent[i] = open / Math.sqrt(temperature[q]!)
        if (!transitional || shut[i] === 1 || passageLengthM[i] === 0) continue
        const middle = (temperature[i]! + temperature[q]!) / 2
        const eta = run.viscosityPaS ?? viscosity(run.gas, middle)
        const d = passageDiameterM[i]!
        viscous[i] = viscousSpecific(d, 1, eta) / (passageLengthM[i]! * BOLTZMANN * middle)
        slip[i] = slipPerPascal(run.gas, d, middle, eta)
      }
      for (const [i, pump] of run.pumps.entries()) {
        // In molecular flow p/sqrt(T) is equal in the tube and at the mouth.
        const wallK = temperature[pump.node]!
        pumpFactor[i] =
          pump.mouthK === undefined
            ? 1 / (BOLTZMANN * wallK)
            : 1 / (BOLTZMANN * Math.sqrt(pump.mouthK * wallK))
      }
    },

    storage(pressure, amount, slope) {
      for (let i = 0; i < n; i++) {
        const gasSlope = volumeM3[i]! / (BOLTZMANN * temperature[i]!)
        amount[i] = gasSlope * pressure[i]!
        slope[i] = gasSlope
      }
      if (!isotherm) return
      for (let i = 0; i < n; i++) {
        const zone = zoneOf[i]!
        const p = pressure[i]!
        const logP = Math.log(p)
        const low = logP + lowShift[zone]!
        const high = logP + highShift[zone]!
        // ln(1 + e^u) and its slope from one exponential each, without overflow.
        const lowTail = Math.exp(-Math.abs(low))
        const highTail = Math.exp(-Math.abs(high))
        const filled = Math.max(high, 0) + Math.log1p(highTail) - Math.max(low, 0) - Math.log1p(lowTail)
        const highShare = (high > 0 ? 1 : highTail) / (1 + highTail)
        const lowShare = (low > 0 ? 1 : lowTail) / (1 + lowTail)
        const sites = wallM2[i]! * isotherm.capacityPerM2 * width[zone]!
        amount[i]! += sites * filled
        slope[i]! += (sites * (highShare - lowShare)) / p
      }
    },

    flow(pressure, rate, matrix, scale) {
      const { diagonal, toParent, fromParent: parentRow } = matrix
      for (let i = 0; i < n; i++) rate[i] = source[i]!
      for (let i = 1; i < n; i++) {
        const q = parent[i]!
        const mine = pressure[i]!
        const theirs = pressure[q]!
        let flux = fromNode[i]! * mine - fromParent[i]! * theirs
        let byMine = fromNode[i]!
        let byTheirs = -fromParent[i]!
        if (transitional) {
          const x = slip[i]! * 0.5 * (mine + theirs)
          const below = 1 + 1.24 * x
          const factor = (1 + x) / below
          const bend = (-0.12 * slip[i]! * flux) / (below * below)
          flux = flux * factor + 0.5 * viscous[i]! * (mine * mine - theirs * theirs)
          byMine = byMine * factor + bend + viscous[i]! * mine
          byTheirs = byTheirs * factor + bend - viscous[i]! * theirs
        }
        rate[i]! -= flux
        rate[q]! += flux
        diagonal[i]! += scale * byMine
        diagonal[q]! -= scale * byTheirs
        toParent[i] = scale * byTheirs
        parentRow[i] = -scale * byMine
      }
      for (let i = 0; i < run.pumps.length; i++) {
        const curve = pumpCurve[i]
        if (!curve) continue
        const node = run.pumps[i]!.node
        rate[node]! -= pumpFactor[i]! * pumpThroughput(curve, pressure[node]!)
        diagonal[node]! += scale * pumpFactor[i]! * pumpThroughputSlope(curve, pressure[node]!)
      }
    },

    sourceTotal() {
      let sum = 0
      for (let i = 0; i < n; i++) sum += source[i]!
      return sum
    },

    pumpTotal(pressure) {
      let sum = 0
      for (let i = 0; i < run.pumps.length; i++) {
        const curve = pumpCurve[i]
        if (curve) sum += pumpFactor[i]! * pumpThroughput(curve, pressure[run.pumps[i]!.node]!)
      }
      return sum
    },
  }
}
