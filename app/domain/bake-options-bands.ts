/**
 * How far the pressures after a bake may differ from what the model names: each doubt is put through the closed forms
 * alone, and the doubts are then taken together as independent ones, by the root of the sum of their squared logarithms.
 */
import { afterBake, type BakeOutcome, type BakeProgramme } from '../physics/bake.ts'
import { nitrogenEquivalent } from '../physics/gauges.ts'
import { MILL_AGE_M2 } from '../physics/hydrogen.ts'
import type { SegmentModel } from '../physics/segment-gas.ts'
import { WATER_FLOOR_PA } from '../physics/water.ts'

/** Water that a rolled wall takes up and gives back, molecules per m² (own choice of the isotherm's calibration). */
const CAPACITY_RANGE = { low: 3e19, high: 4e20 }
/** A capacity fitted to a pump-down is known to about this factor (own choice: gauge and window together). */
const FITTED_CAPACITY = 1.5
/** Authors differ by this factor in the diffusivity of hydrogen at 20 °C (San Marchi, Grant, Avdiaj and Erjavec). */
const DIFFUSIVITY = 2
/** Hydrogen in steel of which nobody has measured any: mill sheets and papers spread by this (from memory, not verified). */
const ASSUMED_CONTENT = 3
/** Low-hydrogen steel that was not measured: floors of steels spread a hundredfold (from memory, not verified). */
const ASSUMED_FLOOR = 10
/** A measured content or floor is as good as the gauge that it was measured with (common practice, no source). */
const MEASURED = 1.3

export interface Doubt {
  gas: 'water' | 'hydrogen'
  words: string
  /** Factors by which the pressure may be lower and higher. */
  down: number
  up: number
}

export interface Band {
  lowPa: number
  highPa: number
}

export interface OutcomeBands {
  water: Band
  hydrogen: Band
  n2: Band
  doubts: Doubt[]
}

/** What the register says of the figures behind a model. */
interface Knowledge {
  waterAssumed: boolean
  hydrogenAssumed: boolean
  toleranceK: number
}

/**
 * Bands around an outcome of `afterBake`, with the doubts they come from.
 *
 * @param outcome what the model says of the same programme, from the closed forms or from a full solve
 */
export function outcomeBands(
  model: SegmentModel,
  programme: BakeProgramme,
  atM: number,
  outcome: Pick<BakeOutcome, 'waterPa' | 'waterAtFloor' | 'hydrogenPa' | 'airPa'>,
  knowledge: Knowledge,
): OutcomeBands {
  const base = afterBake(model, programme, atM)
  const doubts: Doubt[] = []
  let wettestPa = base.waterPa
  for (const { gas, words, variants } of variantsOf(model, programme, knowledge)) {
    const found = variants.map((variant) => afterBake(variant.model, variant.programme, atM))
    const factors = found.map((one) =>
      gas === 'water' ? one.waterPa / base.waterPa : one.hydrogenPa / base.hydrogenPa,
    )
    if (gas === 'water') wettestPa = Math.max(wettestPa, ...found.map(({ waterPa }) => waterPa))
    const down = Math.max(1, 1 / Math.min(...factors))
    const up = Math.max(1, ...factors)
    if (down > 1.01 || up > 1.01) doubts.push({ gas, words, down, up })
  }
  // From the floor upwards no factor means anything: the wettest single doubt is the upper edge.
  const water = outcome.waterAtFloor
    ? { lowPa: WATER_FLOOR_PA, highPa: wettestPa }
    : around(outcome.waterPa, ofGas(doubts, 'water'), WATER_FLOOR_PA)
  const hydrogen = around(outcome.hydrogenPa, ofGas(doubts, 'hydrogen'), 0)
  const n2 = (edge: keyof Band): number =>
    nitrogenEquivalent({ H2O: water[edge], H2: hydrogen[edge], N2: outcome.airPa })
  return { water, hydrogen, n2: { lowPa: n2('lowPa'), highPa: n2('highPa') }, doubts }
}

function ofGas(doubts: readonly Doubt[], gas: Doubt['gas']): Doubt[] {
  return doubts.filter((doubt) => doubt.gas === gas)
}

function around(pa: number, doubts: readonly Doubt[], floorPa: number): Band {
  const together = (edge: 'down' | 'up'): number =>
    Math.exp(Math.sqrt(doubts.reduce((sum, doubt) => sum + Math.log(doubt[edge]) ** 2, 0)))
  return { lowPa: Math.max(floorPa, pa / together('down')), highPa: pa * together('up') }
}

interface Variants {
  gas: Doubt['gas']
  words: string
  variants: { model: SegmentModel; programme: BakeProgramme }[]
}

function variantsOf(model: SegmentModel, programme: BakeProgramme, knowledge: Knowledge): Variants[] {
  const { water, hydrogen } = model
  const { toleranceK } = knowledge
  const other = (change: Partial<SegmentModel>) => ({ model: { ...model, ...change }, programme })
  const found: Variants[] = []
  const warmer = [-toleranceK, toleranceK].map((kelvin) => ({
    model,
    programme: { ...programme, bakeK: Math.max(model.temperatureK, programme.bakeK + kelvin) },
  }))
  const off = `the wall ${toleranceK} K off its setpoint`
  if (water.state === 'unbaked') {
    if (toleranceK > 0) found.push({ gas: 'water', words: off, variants: warmer })
    const capacity = water.capacityPerM2
    const range = knowledge.waterAssumed
      ? [Math.min(capacity, CAPACITY_RANGE.low), Math.max(capacity, CAPACITY_RANGE.high)]
      : [capacity / FITTED_CAPACITY, capacity * FITTED_CAPACITY]
    found.push({
      gas: 'water',
      words: knowledge.waterAssumed
        ? 'water on the wall only assumed: 3×10¹⁹ to 4×10²⁰ molecules per m²'
        : `water on the wall fitted, within a factor of ${FITTED_CAPACITY}`,
      variants: range.map((capacityPerM2) => other({ water: { ...water, capacityPerM2 } })),
    })
  }
  if (hydrogen.kind === 'low-hydrogen') {
    const spread = knowledge.hydrogenAssumed ? ASSUMED_FLOOR : MEASURED
    found.push({
      gas: 'hydrogen',
      words: `outgassing of the fired steel ${knowledge.hydrogenAssumed ? 'assumed' : 'measured'}, within a factor of ${spread}`,
      variants: [1 / spread, spread].map((times) =>
        other({ hydrogen: { ...hydrogen, qPaMS: hydrogen.qPaMS * times } }),
      ),
    })
    return found
  }
  if (toleranceK > 0) found.push({ gas: 'hydrogen', words: off, variants: warmer })
  const spread = knowledge.hydrogenAssumed ? ASSUMED_CONTENT : MEASURED
  const content = (times: number) => ({ ...hydrogen, c0PerM3: hydrogen.c0PerM3 * times })
  found.push(
    {
      gas: 'hydrogen',
      words: `hydrogen in the steel ${knowledge.hydrogenAssumed ? 'assumed' : 'measured'}, within a factor of ${spread}`,
      variants: [1 / spread, spread].map((times) => other({ hydrogen: content(times) })),
    },
    {
      gas: 'hydrogen',
      words: `diffusion in steel known to a factor of ${DIFFUSIVITY}`,
      // A diffusivity k times as high acts like a wall thinner by the root of k that holds as much more per volume.
      variants: [1 / DIFFUSIVITY, DIFFUSIVITY].map((times) =>
        other({ wallM: model.wallM / Math.sqrt(times), hydrogen: content(Math.sqrt(times)) }),
      ),
    },
  )
  if (water.state === 'unbaked' && hydrogen.agedTauM2 > MILL_AGE_M2) {
    found.push({
      gas: 'hydrogen',
      words: 'steel fresh from the mill rather than years old',
      variants: [other({ hydrogen: { ...hydrogen, agedTauM2: MILL_AGE_M2 } })],
    })
  }
  return found
}
