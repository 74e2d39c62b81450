import type { Quantity } from '../readings.ts'
import { mendLabel } from './encoding.ts'

/** SI value = number × factor + offset. */
export interface Unit {
  /** As we write it. */
  token: string
  quantity: Quantity
  factor: number
  offset: number
  /** Volts of a logarithmic gauge: the number of `factor` units is 10 to the power of (V × volts − atUnit) / perDecade. */
  curve?: { volts: number; atUnit: number; perDecade: number }
}

export type UnitReading =
  | { kind: 'unit'; unit: Unit }
  /** Reads against the atmosphere, so no absolute pressure can be told from it. */
  | { kind: 'gauge-pressure'; token: string }
  /** Looks like a unit and is none we may take for granted. */
  | { kind: 'doubtful'; token: string; why: string }
  | { kind: 'none' }

/** One standard atmosphere is 101 325 Pa by definition, and 1 Torr is its 760th part (BIPM, SI brochure; from memory). */
const TORR = 101325 / 760
/** Avoirdupois pound-force on a square inch: 0.45359237 kg × 9.80665 m/s² / (0.0254 m)². */
const PSI = (0.45359237 * 9.80665) / (0.0254 * 0.0254)
/** Technical atmosphere: one kilogram-force on a square centimetre. */
const AT = 98066.5
/** Conventional inch of mercury, 25.4 mm of mercury of 133.322387415 Pa each (from memory). */
const IN_HG = 25.4 * 133.322387415

const TABLE: readonly [string, Quantity, number, number][] = [
  ['Pa', 'pressure', 1, 0],
  ['hPa', 'pressure', 100, 0],
  ['kPa', 'pressure', 1e3, 0],
  ['µPa', 'pressure', 1e-6, 0],
  ['mPa', 'pressure', 1e-3, 0],
  ['MPa', 'pressure', 1e6, 0],
  ['mbar', 'pressure', 100, 0],
  ['µbar', 'pressure', 0.1, 0],
  ['bar', 'pressure', 1e5, 0],
  ['Torr', 'pressure', TORR, 0],
  ['mTorr', 'pressure', TORR / 1000, 0],
  ['mmHg', 'pressure', TORR, 0],
  ['micron', 'pressure', TORR / 1000, 0],
  ['µm', 'pressure', TORR / 1000, 0],
  ['µmHg', 'pressure', TORR / 1000, 0],
  ['atm', 'pressure', 101325, 0],
  ['at', 'pressure', AT, 0],
  ['psi', 'pressure', PSI, 0],
  ['inHg', 'pressure', IN_HG, 0],
  ['°C', 'temperature', 1, 0],
  ['K', 'temperature', 1, -273.15],
  ['°F', 'temperature', 5 / 9, -160 / 9],
  ['V', 'voltage', 1, 0],
  ['mV', 'voltage', 1e-3, 0],
  ['kV', 'voltage', 1e3, 0],
  ['A', 'current', 1, 0],
  ['mA', 'current', 1e-3, 0],
  ['µA', 'current', 1e-6, 0],
  ['nA', 'current', 1e-9, 0],
  ['pA', 'current', 1e-12, 0],
  ['kA', 'current', 1e3, 0],
  ['Wh', 'energy', 1e-3, 0],
  ['kWh', 'energy', 1, 0],
  ['MWh', 'energy', 1e3, 0],
  ['%', 'oxygen', 1, 0],
  ['mm', 'stroke', 1, 0],
  ['Ω', 'resistance', 1, 0],
  ['mΩ', 'resistance', 1e-3, 0],
  ['µΩ', 'resistance', 1e-6, 0],
]

const BY_TOKEN = new Map<string, Unit>(
  TABLE.map(([token, quantity, factor, offset]) => [token, { token, quantity, factor, offset }]),
)

/** Other spellings that can mean nothing else. Prefix letters keep their case: m is not M. */
const SPELLINGS: Record<string, string> = {
  pascal: 'Pa',
  PA: 'Pa',
  HPA: 'hPa',
  KPA: 'kPa',
  KPa: 'kPa',
  hpa: 'hPa',
  kpa: 'kPa',
  pa: 'Pa',
  millibar: 'mbar',
  mBar: 'mbar',
  'mbar a': 'mbar',
  mbara: 'mbar',
  uPa: 'µPa',
  ubar: 'µbar',
  microbar: 'µbar',
  Bar: 'bar',
  BAR: 'bar',
  bara: 'bar',
  torr: 'Torr',
  TORR: 'Torr',
  mtorr: 'mTorr',
  mmhg: 'mmHg',
  MMHG: 'mmHg',
  microns: 'micron',
  MICRON: 'micron',
  um: 'µm',
  umHg: 'µmHg',
  ATM: 'atm',
  psia: 'psi',
  'psi(a)': 'psi',
  'psi a': 'psi',
  PSIA: 'psi',
  'inHg abs': 'inHg',
  inhg: 'inHg',
  C: '°C',
  degC: '°C',
  'deg C': '°C',
  '° C': '°C',
  '℃': '°C',
  F: '°F',
  degF: '°F',
  'deg F': '°F',
  '° F': '°F',
  '℉': '°F',
  kelvin: 'K',
  volt: 'V',
  volts: 'V',
  Volt: 'V',
  amp: 'A',
  amps: 'A',
  Amp: 'A',
  Ampere: 'A',
  uA: 'µA',
  kwh: 'kWh',
  KWH: 'kWh',
  '% O2': '%',
  '%O2': '%',
  '% vol': '%',
  ohm: 'Ω',
  Ohm: 'Ω',
  mOhm: 'mΩ',
  uOhm: 'µΩ',
}

const GAUGE =
  /^(?:psig|psi\s*\(?g\)?|barg|bar\s*\(?g\)?|mbarg|inhg\s*vac(?:uum)?|"?hg\s*vac|kpag|kpa\s*\(g\))$/i

/** Reads one unit token, e.g. the inside of the brackets of `P1 (mbar)`. Surrounding blanks do not matter. */
export function readUnit(raw: string): UnitReading {
  // The Greek letter mu and the micro sign look alike; one spelling serves for both.
  const token = mendLabel(raw)
    .trim()
    .replace(/\u03bc/g, 'µ')
    .replace(/\u2126/g, 'Ω')
  if (token === '') return { kind: 'none' }
  const unit = BY_TOKEN.get(token) ?? BY_TOKEN.get(SPELLINGS[token] ?? '')
  if (unit !== undefined) return { kind: 'unit', unit }
  if (GAUGE.test(token)) return { kind: 'gauge-pressure', token }
  if (/^[?\ufffd\u0080-\u00bf]+(?:bar|pa|torr|m|a|ohm)$/i.test(token))
    return { kind: 'doubtful', token, why: 'its first letter was lost in transfer' }
  if (/^(?:mega)?m(?:torr|bar|pa|a|v)$/i.test(token))
    return { kind: 'doubtful', token, why: 'm (thousandth) and M (million) cannot be told apart here' }
  return { kind: 'none' }
}

/** The unit for a token that must be one; null otherwise. For profiles and answers. */
export function unitOf(token: string | null | undefined): Unit | null {
  if (token === null || token === undefined) return null
  const reading = readUnit(token)
  return reading.kind === 'unit' ? reading.unit : null
}

/** Units that a column of this quantity may be written in. */
export function unitsOf(quantity: Quantity): Unit[] {
  return Array.from(BY_TOKEN.values()).filter((unit) => unitFits(quantity, unit))
}

/** Whether a column of this quantity may be written in a unit of that quantity. */
export function unitFits(quantity: Quantity, unit: Unit): boolean {
  if (quantity === unit.quantity) return true
  return quantity === 'ion-current' && unit.quantity === 'current'
}

/** SI value of a number in a unit. */
export function toSi(value: number, unit: Unit): number {
  const { curve } = unit
  if (curve !== undefined) return unit.factor * 10 ** ((value * curve.volts - curve.atUnit) / curve.perDecade)
  return unit.offset === 0 ? value * unit.factor : value * unit.factor + unit.offset
}
