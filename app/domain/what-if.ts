/**
 * A trial of a segment: which numbers may be changed, within what, and how all of them stand in an address. The
 * register's own values are where every trial starts from and goes back to.
 */
import { pumpSpeed, type SegmentModel } from '../physics/segment-gas.ts'

const NUMBER_KEYS = [
  'speed',
  'area',
  'water',
  'hydrogen',
  'leak',
  'leakAt',
  'at',
  'days',
  'wait',
  'bakeC',
  'ramp',
  'soak',
] as const

export type WhatIfKey = (typeof NUMBER_KEYS)[number]

/** What a trial is about: pumping alone, or a bake after some pumping. */
export type WhatIfMode = 'pump-down' | 'bake'
/** Whether the wall starts full of water, as after a vent, or as a bake has left it. */
export type WhatIfWall = 'wet' | 'dry'

export interface WhatIfState {
  mode: WhatIfMode
  wall: WhatIfWall
  numbers: Record<WhatIfKey, number>
}

/** What the register gives for a trial. Plain data: it goes to the browser and to the worker in it. */
export interface WhatIfGround {
  tag: string
  /** Cold, with the pumps it has; `water` as the register's history of bakes has it. */
  model: SegmentModel
  /** Molecules of water that a square metre of wet wall holds. */
  waterCapacityPerM2: number
  /** Place of the gauge that is read unless another is asked for, m from the start of the segment. */
  gaugeM: number
  sources: Partial<Record<WhatIfKey, WhatIfSource>>
}

/** Where a number comes from, in words, and the page that holds it. */
export interface WhatIfSource {
  text: string
  to?: string
}

export interface WhatIfField {
  key: WhatIfKey
  label: string
  unit: string
  /** For which trials it counts. */
  mode: WhatIfMode | 'both'
  /** The register's value, or the usual one where the register has none. */
  usual: number
  /** What is accepted. */
  min: number
  max: number
  slider: Slider
  /** What the number is taken to be and do. */
  basis: string
  source: WhatIfSource
}

/** How a slider lies over values; `zero` puts a nought below the logarithmic range. */
interface Slider {
  kind: 'log' | 'zero-log' | 'linear'
  from: number
  to: number
  /** For linear sliders, the step. */
  step?: number
}

/** Steps of a logarithmic slider from end to end. */
const LOG_STEPS = 200
const DIGITS = 3

/** Sum of the pumps' speeds for the gas that a trial names speeds by: water where any pump takes it, else hydrogen. */
export function speedOf(model: SegmentModel): { gas: 'H2O' | 'H2'; speedM3S: number } {
  const sum = (gas: 'H2O' | 'H2') => model.pumps.reduce((total, pump) => total + pumpSpeed(pump, gas), 0)
  const water = sum('H2O')
  return water > 0 ? { gas: 'H2O', speedM3S: water } : { gas: 'H2', speedM3S: sum('H2') }
}

/** Inner wall of the plain tube, m2. */
export function wallAreaOf({ diameterM, lengthM }: SegmentModel): number {
  return Math.PI * diameterM * lengthM
}

const PLANNED: WhatIfSource = { text: 'A usual value to start from; the register has no such number.' }

/** Every number of a trial with its limits, its slider and its grounds. */
export function whatIfFields(ground: WhatIfGround): WhatIfField[] {
  const { model, sources } = ground
  const { gas, speedM3S } = speedOf(model)
  const area = wallAreaOf(model)
  const log = (usual: number, down: number, up: number): Slider => ({
    kind: 'log',
    from: usual / down,
    to: usual * up,
  })
  const linear = (from: number, to: number, step: number): Slider => ({ kind: 'linear', from, to, step })
  const low = model.hydrogen.kind === 'low-hydrogen' ? model.hydrogen.qPaMS : null
  const hydrogen = model.hydrogen.kind === 'diffusion' ? model.hydrogen.c0PerM3 : model.hydrogen.qPaMS
  const place = { unit: 'm', min: 0, max: model.lengthM, slider: linear(0, model.lengthM, 1) }
  const all: (Omit<WhatIfField, 'source' | 'mode'> & { mode?: WhatIfMode })[] = [
    {
      key: 'speed',
      label: `Pumping speed for ${gas === 'H2O' ? 'water' : 'hydrogen'}`,
      unit: 'm³/s',
      usual: speedM3S,
      min: speedM3S / 1000,
      max: speedM3S * 1000,
      slider: log(speedM3S, 20, 20),
      basis:
        'At the tube, all pumps together. Their speeds for the other gases change in the same proportion.',
    },
    {
      key: 'area',
      label: 'Wall area',
      unit: 'm²',
      usual: area,
      min: area / 100,
      max: area * 100,
      slider: log(area, 10, 10),
      basis:
        'Everything that gives gas, baffles and bellows included. The plain tube to begin with; bore and length, and so the flow along it, stay as they are.',
    },
    {
      key: 'water',
      label: 'Water on the wall',
      unit: 'molecules/m²',
      usual: ground.waterCapacityPerM2,
      min: 1e16,
      max: 1e23,
      slider: log(ground.waterCapacityPerM2, 30, 30),
      basis:
        'What a full wall holds, spread over its energies of binding. Counts only while the wall is wet.',
    },
    {
      key: 'hydrogen',
      label: low === null ? 'Hydrogen in the steel' : 'Hydrogen from the wall at 20 °C',
      unit: low === null ? 'atoms/m³' : 'Pa·m/s',
      usual: hydrogen,
      min: hydrogen / 1e4,
      max: hydrogen * 1e4,
      slider: log(hydrogen, 100, 100),
      basis:
        low === null
          ? 'Mobile hydrogen when the sheet left the mill; it leaves by diffusion, faster when hot.'
          : 'Measured rate of steel low in hydrogen; a bake raises it while hot and leaves it as it was.',
    },
    {
      key: 'leak',
      label: 'Air leak',
      unit: 'Pa·m³/s',
      usual: 0,
      min: 0,
      max: 1,
      slider: { kind: 'zero-log', from: 1e-10, to: 1e-4 },
      basis: 'Constant, counted as nitrogen. The argon in it, which getters leave, is not counted.',
    },
    { key: 'leakAt', label: 'Place of the leak', usual: model.lengthM / 2, basis: FROM_START, ...place },
    { key: 'at', label: 'Place of the gauge', usual: ground.gaugeM, basis: FROM_START, ...place },
    {
      key: 'days',
      label: 'Days of pumping',
      unit: 'd',
      mode: 'pump-down',
      usual: 30,
      min: 1,
      max: 3650,
      slider: { kind: 'log', from: 3, to: 300 },
      basis: 'From the start of high vacuum.',
    },
    {
      key: 'wait',
      label: 'Pumping before the bake',
      unit: 'h',
      mode: 'bake',
      usual: 24,
      min: 1,
      max: 8766,
      slider: linear(6, 720, 6),
      basis: 'From the start of high vacuum to the first kelvin.',
    },
    {
      key: 'bakeC',
      label: 'Bake temperature',
      unit: '°C',
      mode: 'bake',
      usual: 150,
      min: 40,
      max: 400,
      slider: linear(60, 200, 1),
      basis:
        'Of the whole wall alike. What the parts of the segment stand is not looked at here: the bake options do that.',
    },
    {
      key: 'ramp',
      label: 'Ramp, up and down',
      unit: 'K/h',
      mode: 'bake',
      usual: 5,
      min: 0.2,
      max: 100,
      slider: linear(1, 20, 0.5),
      basis: 'The same both ways.',
    },
    {
      key: 'soak',
      label: 'Soak',
      unit: 'h',
      mode: 'bake',
      usual: 168,
      min: 1,
      max: 8766,
      slider: linear(1, 720, 1),
      basis: 'At the bake temperature, ramps not counted.',
    },
  ]
  return all.map((field) => ({ mode: 'both', source: sources[field.key] ?? PLANNED, ...field }))
}

const FROM_START = 'Counted from the start of the segment.'

/** The trial that changes nothing. */
export function usualState(ground: WhatIfGround): WhatIfState {
  const numbers = Object.fromEntries(whatIfFields(ground).map(({ key, usual }) => [key, usual]))
  return {
    mode: 'pump-down',
    wall: ground.model.water.state === 'unbaked' ? 'wet' : 'dry',
    numbers: numbers as WhatIfState['numbers'],
  }
}

/** A number as it stands in a field and in an address: short, and read back as the same one to six figures. */
export function numberText(value: number): string {
  const rounded = Number(value.toPrecision(6))
  const size = Math.abs(rounded)
  return size !== 0 && (size < 1e-3 || size >= 1e6) ? rounded.toExponential() : String(rounded)
}

/** Whole steps that a slider has. */
export function sliderSteps({ kind, from, to, step = 1 }: Slider): number {
  if (kind === 'linear') return Math.round((to - from) / step)
  return kind === 'log' ? LOG_STEPS : LOG_STEPS + 1
}

/** Step of a slider that lies nearest to a value. */
export function sliderStepOf(slider: Slider, value: number): number {
  const { kind, from, to, step = 1 } = slider
  const inside = (at: number) => Math.round(Math.min(sliderSteps(slider), Math.max(0, at)))
  if (kind === 'linear') return inside((value - from) / step)
  if (kind === 'zero-log' && value <= 0) return 0
  const at = (Math.log(Math.max(value, from) / from) / Math.log(to / from)) * LOG_STEPS
  return inside(kind === 'log' ? at : at + 1)
}

/** Value at a step of a slider, rounded to what the eye can set. */
export function sliderValueAt(slider: Slider, at: number): number {
  const { kind, from, to, step = 1 } = slider
  if (kind === 'linear') return Number((from + at * step).toPrecision(12))
  if (kind === 'zero-log' && at <= 0) return 0
  const share = (kind === 'log' ? at : at - 1) / LOG_STEPS
  return Number((from * (to / from) ** share).toPrecision(DIGITS))
}
