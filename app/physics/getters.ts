/** Getters in a meshed tube: how fast the film takes gas, and how much slower it and getter pumps are the fuller they get. */
import { BOLTZMANN, T20_K } from './constants.ts'
import type { GasRun } from './gas-run.ts'
import type { TubeMesh } from './tube.ts'

export interface Getters {
  /** Molecules per second and pascal that the film takes, times sqrt(T), when fresh; by node. Null without a film. */
  readonly film: Float64Array | null
  /** Share of its capacity that is used up: of the film by node, of the pumps by their order. */
  readonly filmFilled: Float64Array
  readonly pumpFilled: Float64Array
  /** Forgets what was counted since the last `settle`. */
  restart(): void
  /** Counts molecules given to the film of a node or to a pump; answers the share of the capacity counted so far. */
  countFilm(node: number, molecules: number): number
  countPump(pump: number, molecules: number): number
  /** What was counted is in the getters now. */
  settle(): void
}

/** The getters of a run, fresh; null when nothing in it fills up. `rootOfMass` is sqrt(2 pi m k). */
export function gettersOf(run: GasRun, mesh: TubeMesh, rootOfMass: number): Getters | null {
  const { getter, pumps } = run
  if (!getter && pumps.every((pump) => pump.capacityPaM3 === undefined)) return null
  const share = getter?.wallShare ?? 1
  const coated = mesh.wallM2.map((area, i) =>
    getter ? area * (typeof share === 'number' ? share : share[i]!) : 0,
  )
  const filmFilled = new Float64Array(mesh.count)
  const filmPending = new Float64Array(mesh.count)
  const pumpFilled = new Float64Array(pumps.length)
  const pumpPending = new Float64Array(pumps.length)
  const pumpRoom = pumps.map((pump) => (pump.capacityPaM3 ?? Infinity) / (BOLTZMANN * T20_K))
  return {
    film: getter ? coated.map((area) => (getter.sticking * area) / rootOfMass) : null,
    filmFilled,
    pumpFilled,
    restart() {
      filmPending.fill(0)
      pumpPending.fill(0)
    },
    countFilm(node, molecules) {
      if (!getter || coated[node] === 0) return 0
      filmPending[node]! += molecules / (getter.capacityPerM2 * coated[node]!)
      return filmPending[node]!
    },
    countPump(pump, molecules) {
      pumpPending[pump]! += molecules / pumpRoom[pump]!
      return pumpPending[pump]!
    },
    settle() {
      for (let i = 0; i < filmFilled.length; i++) filmFilled[i]! += filmPending[i]!
      for (let i = 0; i < pumpFilled.length; i++) pumpFilled[i]! += pumpPending[i]!
    },
  }
}
