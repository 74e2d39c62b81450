/**
 * One gas in a meshed tube: how much each node holds, how it flows between nodes, and what comes and goes. Amounts
 * are molecules, so that a changing wall temperature needs no terms of its own.
 *
 * Molecular flow follows the gradient of p/sqrt(T), which isothermally is Knudsen's long tube; transitional flow adds
 * Knudsen's slip factor and the laminar part.
 */
import { requireWithin } from './argument-checks.ts'
import { slipPerPascal, viscousSpecific } from './conductance.ts'
import { BOLTZMANN, T20_K } from './constants.ts'
import { PhysicsError } from './errors.ts'
import {
  type GasRun,
  requireGasRun,
  stepAt,
  type ThermalState,
  unbakedKelvin,
  type ValveMotion,
  wholeWallRate,
} from './gas-run.ts'
import { moleculeMass, viscosity } from './gases.ts'
import { gettersOf } from './getters.ts'
import { temperatureAt } from './programme.ts'
import { type PumpCurve, pumpThroughput, pumpThroughputSlope } from './pumps.ts'
import type { TreeMatrix } from './tree-matrix.ts'
import type { TubeMesh } from './tube.ts'
import { valvePassages } from './valve-passages.ts'
import { addAdsorbed, wallSites } from './wall-sites.ts'

export interface GasBalance {
  /** Pressures do not enter storage or flow other than linearly. */
  readonly linear: boolean
  /** Molecules per second brought into each node by wall and leaks at the prepared time. */
  readonly source: Float64Array
  /** Grows whenever anything but `source` has changed: a factored matrix of a linear gas stays good until then. */
  version(): number
  /** Take on the pumps, leaks and valves that hold from this time on. */
  enter(atS: number): void
  /** Temperatures, passages and sources at this time. */
  prepare(atS: number): void
  /** Molecules at each node, and their slope over pressure. */
  storage(pressure: Float64Array, amount: Float64Array, slope: Float64Array): void
  /** Net molecules per second into each node; puts -scale d(rate)/dp into the matrix, on top of its excess. */
  flow(pressure: Float64Array, rate: Float64Array, matrix: TreeMatrix, scale: number): void
  /** Molecules per second brought in by wall and leaks at the prepared time. */
  sourceTotal(): number
  /** Molecules per second taken by pumps and getters at the prepared time. */
  pumpTotal(pressure: Float64Array): number
  /** Getters only: a step of `seconds` begins at these pressures. */
  begin(pressure: Float64Array, seconds: number): void
  /** Getters only: counts what these pressures give them in `seconds`, and says the largest share of a capacity. */
  take(pressure: Float64Array, seconds: number): number
  /** Getters only: the step is taken, and what was counted is in them. */
  settle(): void
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
  const zones = thermal.programmes.length
  const zoneOf = thermal.zoneOfNode ?? new Int32Array(n)
  for (const zone of zoneOf) requireWithin('zone of a node', zone, 0, zones - 1)
  requireGasRun(run, n)
  const leaks = run.leaks ?? []
  const rootOfMass = Math.sqrt(2 * Math.PI * moleculeMass(run.gas) * BOLTZMANN)
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
  const valveFlow = valvePassages()
  const gasPerPa = new Float64Array(n)
  const source = new Float64Array(n)
  const pumpCurve: (PumpCurve | null)[] = run.pumps.map(() => null)
  const pumpFactor = new Float64Array(run.pumps.length)
  const pumpMouth = new Float64Array(run.pumps.length)
  const leakRate = new Float64Array(leaks.length)

  const getters = gettersOf(run, mesh, rootOfMass)
  const film = getters?.film ?? null
  const filmSpeed = new Float64Array(n)

  const baked = run.isotherm && wallSites(run.isotherm, mesh, zones, 1 - (run.unbaked?.share ?? 0))
  const unbaked = run.isotherm && run.unbaked && wallSites(run.isotherm, mesh, zones, run.unbaked.share)
  const zoneK = new Float64Array(zones)
  const zoneRate = new Float64Array(zones)
  const zoneWall = new Float64Array(zones)
  for (let i = 0; i < n; i++) zoneWall[zoneOf[i]!]! += wallM2[i]!
  const zoneRoot = new Float64Array(zones)
  const wallRates = thermal.programmes.map((programme) => wholeWallRate(run, programme, fromS))
  let changed = true
  let version = 0

  function preparePassages(): void {
    valveFlow.clear()
    for (let i = 0; i < n; i++) gasPerPa[i] = volumeM3[i]! / (BOLTZMANN * zoneK[zoneOf[i]!]!)
    for (let i = 1; i < n; i++) {
      const q = parent[i]!
      const open = shut[i] === 1 ? 0 : passage[i]!
      fromNode[i] = open * zoneRoot[zoneOf[i]!]!
      fromParent[i] = open * zoneRoot[zoneOf[q]!]!
      if (!transitional || shut[i] === 1) continue
      const middle = (zoneK[zoneOf[i]!]! + zoneK[zoneOf[q]!]!) / 2
      const eta = run.viscosityPaS ?? viscosity(run.gas, middle)
      const d = passageDiameterM[i]!
      if (passageLengthM[i] === 0) {
        valveFlow.open(i, run.gas, d, middle, eta)
        continue
      }
      viscous[i] = viscousSpecific(d, 1, eta) / (passageLengthM[i]! * BOLTZMANN * middle)
      slip[i] = slipPerPascal(run.gas, d, middle, eta)
    }
    for (const [i, pump] of run.pumps.entries()) {
      // In molecular flow p/sqrt(T) is equal in the tube and at the mouth.
      const wallK = zoneK[zoneOf[pump.node]!]!
      const mouth =
        pump.mouthK === undefined ? 1 / (BOLTZMANN * wallK) : 1 / (BOLTZMANN * Math.sqrt(pump.mouthK * wallK))
      pumpMouth[i] = mouth
      pumpFactor[i] = getters ? mouth * getters.pumpShare[i]! : mouth
    }
    if (!getters || !film) return
    for (let i = 0; i < n; i++) {
      filmSpeed[i] = film[i]! * zoneRoot[zoneOf[i]!]! * getters.filmShare[i]!
    }
  }

  return {
    linear: !run.isotherm && !transitional && run.pumps.every(({ curve }) => curve.every(isLinear)),
    source,
    version: () => version,

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
      changed = true
    },

    prepare(atS) {
      for (let zone = 0; zone < zones; zone++) {
        const kelvin = temperatureAt(thermal.programmes[zone]!, atS)
        zoneRate[zone] = wallRates[zone]!(atS, kelvin)
        if (kelvin === zoneK[zone]) continue
        changed = true
        zoneK[zone] = kelvin
        zoneRoot[zone] = 1 / Math.sqrt(kelvin)
        baked?.warm(zone, kelvin)
        if (run.unbaked) unbaked?.warm(zone, unbakedKelvin(run.unbaked, kelvin))
      }
      if (changed) {
        preparePassages()
        baked?.spread(zoneOf)
        unbaked?.spread(zoneOf)
        version++
        changed = false
      }
      for (let i = 0; i < n; i++) source[i] = zoneRate[zoneOf[i]!]! * wallM2[i]!
      for (let i = 0; i < leaks.length; i++) source[leaks[i]!.node]! += leakRate[i]!
    },

    storage(pressure, amount, slope) {
      for (let i = 0; i < n; i++) {
        amount[i] = gasPerPa[i]! * pressure[i]!
        slope[i] = gasPerPa[i]!
      }
      if (baked) addAdsorbed(baked, pressure, amount, slope)
      if (unbaked) addAdsorbed(unbaked, pressure, amount, slope)
    },

    flow(pressure, rate, matrix, scale) {
      const { excess, up, down } = matrix
      rate.set(source)
      if (film) {
        for (let i = 0; i < n; i++) {
          rate[i]! -= filmSpeed[i]! * pressure[i]!
          excess[i]! += scale * filmSpeed[i]!
        }
      }
      for (let i = 1; i < n; i++) {
        const q = parent[i]!
        const mine = pressure[i]!
        const theirs = pressure[q]!
        let byMine = fromNode[i]!
        let byTheirs = fromParent[i]!
        let flux = byMine * mine - byTheirs * theirs
        if (transitional && passageLengthM[i]! > 0) {
          const x = slip[i]! * 0.5 * (mine + theirs)
          const below = 1 + 1.24 * x
          const factor = (1 + x) / below
          const bend = (-0.12 * slip[i]! * flux) / (below * below)
          flux = flux * factor + 0.5 * viscous[i]! * (mine * mine - theirs * theirs)
          byMine = byMine * factor + bend + viscous[i]! * mine
          byTheirs = byTheirs * factor - bend + viscous[i]! * theirs
        }
        rate[i]! -= flux
        rate[q]! += flux
        up[i] = scale * byMine
        down[i] = scale * byTheirs
      }
      valveFlow.replaceFlow(pressure, rate, matrix, scale)
      for (let i = 0; i < run.pumps.length; i++) {
        const curve = pumpCurve[i]
        if (!curve) continue
        const node = run.pumps[i]!.node
        rate[node]! -= pumpFactor[i]! * pumpThroughput(curve, pressure[node]!)
        excess[node]! += scale * pumpFactor[i]! * pumpThroughputSlope(curve, pressure[node]!)
      }
    },

    sourceTotal() {
      let sum = 0
      for (let zone = 0; zone < zones; zone++) sum += zoneRate[zone]! * zoneWall[zone]!
      for (let i = 0; i < leaks.length; i++) sum += leakRate[i]!
      return sum
    },

    pumpTotal(pressure) {
      let sum = 0
      for (let i = 0; i < run.pumps.length; i++) {
        const curve = pumpCurve[i]
        if (curve) sum += pumpFactor[i]! * pumpThroughput(curve, pressure[run.pumps[i]!.node]!)
      }
      if (film) for (let i = 0; i < n; i++) sum += filmSpeed[i]! * pressure[i]!
      return sum
    },

    begin(pressure, seconds) {
      if (!getters) return
      for (let i = 0; i < run.pumps.length; i++) {
        const curve = pumpCurve[i]
        const taken = curve ? pumpMouth[i]! * pumpThroughput(curve, pressure[run.pumps[i]!.node]!) : 0
        getters.beginPump(i, taken, seconds)
      }
      if (film) {
        for (let i = 0; i < n; i++) {
          getters.beginFilm(i, film[i]! * zoneRoot[zoneOf[i]!]! * pressure[i]!, seconds)
        }
      }
      changed = true
    },

    take(pressure, seconds) {
      if (!getters) return 0
      let largest = 0
      for (let i = 0; i < run.pumps.length; i++) {
        const curve = pumpCurve[i]
        if (!curve) continue
        const rate = pumpFactor[i]! * pumpThroughput(curve, pressure[run.pumps[i]!.node]!)
        largest = Math.max(largest, getters.countPump(i, rate * seconds))
      }
      if (!film) return largest
      for (let i = 0; i < n; i++) {
        largest = Math.max(largest, getters.countFilm(i, filmSpeed[i]! * pressure[i]! * seconds))
      }
      return largest
    },

    settle() {
      getters?.settle()
    },
  }
}

function isLinear(step: { readonly value: PumpCurve | null }): boolean {
  return step.value === null || step.value.kind === 'constant'
}
