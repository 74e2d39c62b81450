/** A reading that a person took from an instrument and types in: the form, and what its value means. */
import { z } from 'zod'
import { CellReader } from '../night-files/cells.ts'
import { NumberReader } from '../night-files/numbers.ts'
import { type Unit, unitFits, unitOf } from '../night-files/units.ts'
import { WordBook } from '../night-files/words.ts'
import { powerText } from '../power-text.ts'
import { PLAUSIBLE, QUANTITIES, type Quality, type Quantity, qualityWord } from '../readings.ts'
import { siteInstant } from './instant.ts'

export const TYPED_QUANTITIES = [
  'pressure',
  'temperature',
  'oxygen',
  'stroke',
  'voltage',
  'current',
  'resistance',
] as const satisfies readonly Quantity[]
export type TypedQuantity = (typeof TYPED_QUANTITIES)[number]

/** Units offered, the usual one of each quantity first. */
export const TYPED_UNITS: Record<TypedQuantity, readonly string[]> = {
  pressure: ['Pa', 'hPa', 'mbar', 'µbar', 'Torr', 'mTorr'],
  temperature: ['°C', 'K', '°F'],
  oxygen: ['%'],
  stroke: ['mm'],
  voltage: ['V', 'mV'],
  current: ['A', 'mA', 'µA'],
  resistance: ['Ω', 'mΩ', 'µΩ'],
}

/** What an instrument on a tube can show, in the unit of the quantity; our own judgement, wide on purpose. */
const CAN_BE: Record<TypedQuantity, { min: number; max: number }> = {
  ...PLAUSIBLE,
  oxygen: { min: 0, max: 100 },
  stroke: { min: -200, max: 500 },
  voltage: { min: -1_000, max: 1_000 },
  current: { min: -10_000, max: 10_000 },
  resistance: { min: 0, max: 1e9 },
}

/** The form. Whether value and unit fit the position is told when the position is known. */
export function typedReadingSchema(zone: string) {
  return z.object({
    position: z.string().trim().min(1, 'Choose the position that you read.').max(20),
    value: z.string().trim().min(1, 'Type what the instrument shows, such as 2.4e-5.').max(40),
    unit: z.string().trim().min(1, 'Choose the unit that the instrument shows.').max(24),
    at: siteInstant(zone),
    instrument: z.string().trim().max(80, 'At most 80 characters.').default(''),
    note: z.string().trim().max(500, 'At most 500 characters.').default(''),
  })
}

export type TypedReadingForm = z.infer<ReturnType<typeof typedReadingSchema>>

export interface TypedValue {
  /** In the unit of the quantity; null where a word was typed. */
  value: number | null
  bound: number | null
  quality: Quality
}

export type ReadTypedValue =
  | { ok: true; typed: TypedValue }
  | { ok: false; field: 'value' | 'unit'; message: string }

/**
 * What was typed, by the rules of log files. What a file would have stored as suspect is refused here instead, since
 * the person can still look again.
 */
export function readTypedValue(text: string, unitText: string, quantity: TypedQuantity): ReadTypedValue {
  const { label } = QUANTITIES[quantity]
  const unit = unitOf(unitText)
  if (unit === null || !unitFits(quantity, unit)) {
    return no(
      'unit',
      `Found “${unitText}”; expected a unit of ${label.toLowerCase()} (${TYPED_UNITS[quantity].join(', ')}). Choose the one that the instrument shows, or another position.`,
    )
  }
  const cells = new CellReader(numbersOf(text), new WordBook({}), [])
  const fault = cells.read(text, quantity, unit)
  if (fault !== null) {
    return no(
      'value',
      `Found “${text}”; expected a number such as ${example(quantity)}, a bound such as >1e-2, or a word such as off. Type what the instrument shows.`,
    )
  }
  if (cells.cellUnit !== null)
    return no(
      'value',
      `Found “${text}”, with a unit in it; expected the number alone. Choose the unit beside it.`,
    )
  const { min, max } = CAN_BE[quantity]
  const { value } = cells
  const doubtful = cells.doubt !== null && cells.doubt !== 'spaced'
  if (!Number.isNaN(value) && (doubtful || value < min || value > max))
    return no('value', outside(text, unit, quantity, value))
  const word = qualityWord(cells.quality)
  return {
    ok: true,
    typed: { value: orNull(value), bound: orNull(cells.bound), quality: word === 'good' ? 'manual' : word },
  }
}

function no(field: 'value' | 'unit', message: string): ReadTypedValue {
  return { ok: false, field, message }
}

/** A comma is a decimal mark here, as in files; with a point beside it the text is no number. */
function numbersOf(text: string): NumberReader {
  const decimalMark = text.includes(',') && !text.includes('.') ? ',' : '.'
  return new NumberReader({ decimalMark, thousandsMark: null, bareExponent: false })
}

function orNull(value: number): number | null {
  return Number.isNaN(value) ? null : value
}

function example(quantity: TypedQuantity): string {
  return quantity === 'pressure' ? '2.4e-5' : '21.5'
}

function outside(text: string, unit: Unit, quantity: TypedQuantity, value: number): string {
  const { min, max } = CAN_BE[quantity]
  const own = QUANTITIES[quantity].unit
  const meant = unit.token === own ? '' : `, which is ${valueText(value, quantity)}`
  const mend =
    quantity === 'pressure' && value === 0
      ? 'An instrument that shows zero has no reading: type “off”, or “<” and its lowest value.'
      : 'Look at the number and its unit again.'
  return `Found ${text} ${unit.token}${meant}; expected ${numberText(min, quantity)} to ${numberText(max, quantity)} ${own}. ${mend}`
}

/** Whether a value lies in the range of an instrument (unit of the quantity); the message when it does not. */
export function outsideInstrument(
  value: number,
  quantity: TypedQuantity,
  instrument: { serial: string; rangeMin: number | null; rangeMax: number | null },
): string | null {
  const { serial, rangeMin, rangeMax } = instrument
  if ((rangeMin === null || value >= rangeMin) && (rangeMax === null || value <= rangeMax)) return null
  const span =
    rangeMin === null
      ? `up to ${valueText(rangeMax as number, quantity)}`
      : rangeMax === null
        ? `${valueText(rangeMin, quantity)} and above`
        : `${numberText(rangeMin, quantity)} to ${valueText(rangeMax, quantity)}`
  return `Found ${valueText(value, quantity)}; expected what ${serial} can read, ${span}. Look at the number, its unit and the instrument again; beyond its range type “>” or “<” and the end of it.`
}

function numberText(value: number, quantity: TypedQuantity): string {
  return quantity === 'pressure' ? powerText(value) : String(Number(value.toPrecision(6)))
}

/** A value in the unit of its quantity, for a sentence. */
export function valueText(value: number, quantity: TypedQuantity): string {
  return `${numberText(value, quantity)} ${QUANTITIES[quantity].unit}`
}
