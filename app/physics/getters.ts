/** Getters in a meshed tube: how fast the film takes gas, and how much slower it and getter pumps are the fuller they get. */
import { BOLTZMANN, T20_K } from './constants.ts'
import type { GasRun } from './gas-run.ts'
import type { TubeMesh } from './tube.ts'

/**
 * Places that fill up. In a step each works at its mean share of the fresh speed, r (1 - e^(-k h))/(k h) with r the
 * room left and k the rate at which it would fill at the present pressure: exact while the pressure stands, and no step
 * can overfill a place by more than the pressure rises in it.
 */
export interface Getters {
  /** Molecules per second and pascal that the fresh film takes, times sqrt(T); by node. Null without a film. */
  readonly film: Float64Array | null
  /** Share of the fresh speed that holds in this step: of the film by node, of the pumps by their order. */
  readonly filmShare: Float64Array
  readonly pumpShare: Float64Array
  /** Sets the share of a place for a step of `seconds` from the molecules per second that it would take fresh. */
  beginFilm(node: number, freshRate: number, seconds: number): void
  beginPump(pump: number, freshRate: number, seconds: number): void
  /** Counts molecules given in the running step; answers the share of the capacity they take. */
  countFilm(node: number, molecules: number): number
  countPump(pump: number, molecules: number): number
  /** The step is taken: what was counted is in the getters now. */
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
  const film = fillers(Array.from(coated, (area) => area * (getter?.capacityPerM2 ?? 0)))
  const pump = fillers(pumps.map(({ capacityPaM3 = Infinity }) => capacityPaM3 / (BOLTZMANN * T20_K)))
  return {
    film: getter ? coated.map((area) => (getter.sticking * area) / rootOfMass) : null,
    filmShare: film.share,
    pumpShare: pump.share,
    beginFilm: film.begin,
    beginPump: pump.begin,
    countFilm: film.count,
    countPump: pump.count,
    settle() {
      film.settle()
      pump.settle()
    },
  }
}

function fillers(capacity: readonly number[]) {
  const filled = new Float64Array(capacity.length)
  const pending = new Float64Array(capacity.length)
  const share = new Float64Array(capacity.length).fill(1)
  return {
    share,
    begin(i: number, freshRate: number, seconds: number): void {
      pending[i] = 0
      const room = Math.max(0, 1 - filled[i]!)
      const turns = (freshRate * seconds) / capacity[i]!
      share[i] = turns > 1e-9 ? (-room * Math.expm1(-turns)) / turns : room
    },
    count(i: number, molecules: number): number {
      if (capacity[i] === 0) return 0
      pending[i]! += molecules / capacity[i]!
      return pending[i]!
    },
    settle(): void {
      for (let i = 0; i < filled.length; i++) filled[i]! += pending[i]!
    },
  }
}
