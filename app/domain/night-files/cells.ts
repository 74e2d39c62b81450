import { PLAUSIBLE, type Quality, type Quantity, qualityCode } from '../readings.ts'
import type { SourceProfile } from '../schemas/source-profile.ts'
import { isCutNumber, type NumberReader } from './numbers.ts'
import { readUnit, toSi, type Unit, unitFits } from './units.ts'
import { keepsValue, type WordBook } from './words.ts'

const GOOD = qualityCode('good')
const SUSPECT = qualityCode('suspect')
const FAULT = qualityCode('fault')
const NO_SIGNAL = qualityCode('no-signal')
const OVER = qualityCode('over-range')
const UNDER = qualityCode('under-range')
const OFF = qualityCode('off')

/** What kept a cell from becoming a reading. */
export type CellFault = 'unreadable-value' | 'unknown-word' | 'unknown-unit' | 'no-unit'

/** What made a reading doubtful; `null` for a plain one. */
export type CellDoubt = 'zero' | 'negative' | 'ceiling' | 'open-sensor' | 'spaced' | null

/**
 * Turns cells into readings. The outcome of the last `read` stands in the public fields: this is the innermost loop
 * of the reader, so nothing is allocated for a plain number.
 */
export class CellReader {
  value = Number.NaN
  bound = Number.NaN
  quality = GOOD
  doubt: CellDoubt = null
  /** Unit written in the cell itself. */
  cellUnit: Unit | null = null
  /** Token of a unit nobody knows, when the fault is `unknown-unit`. */
  badUnit = ''
  readonly #numbers: NumberReader
  readonly #words: WordBook
  readonly #sentinels: readonly { value: number; code: number }[]

  readonly #unitWord: (token: string) => Unit | 'leave-out' | null

  /** `unitWord` says what a unit stands for that only this source writes. */
  constructor(
    numbers: NumberReader,
    words: WordBook,
    sentinels: SourceProfile['sentinels'],
    unitWord: (token: string) => Unit | 'leave-out' | null = () => null,
  ) {
    this.#unitWord = unitWord
    this.#numbers = numbers
    this.#words = words
    this.#sentinels = sentinels.map(({ value, quality }) => ({ value, code: qualityCode(quality) }))
  }

  /**
   * Reads a cell of a channel of the given quantity. `unit` is the column's, null when only the cell can name one.
   * Returns what kept it from being a reading, or null.
   */
  read(text: string, quantity: Quantity, unit: Unit | null): CellFault | null {
    this.value = Number.NaN
    this.bound = Number.NaN
    this.quality = GOOD
    this.doubt = null
    this.cellUnit = null
    const number = this.#numbers.read(text)
    if (!Number.isNaN(number)) return this.#number(number, quantity, unit)
    return this.#other(text.trim(), quantity, unit)
  }

  /** Lets a status word overrule what the value cell said. Returns a fault for a word nobody knows. */
  applyStatus(text: string, quantity: Quantity): CellFault | null {
    const meaning = this.#words.lookUp(text)
    if (meaning === null) return 'unknown-word'
    if (text.trim() === '' || meaning === 'ok' || meaning === 'on') return null
    if (quantity === 'switch') return null
    // The word outranks the number, but a bound such as >1E-2 is kept beside its own kind of word.
    if (this.quality !== qualityCode(meaning)) this.bound = Number.NaN
    this.quality = qualityCode(meaning)
    if (!keepsValue(meaning)) this.value = Number.NaN
    this.doubt = null
    return null
  }

  #number(number: number, quantity: Quantity, unit: Unit | null): CellFault | null {
    for (const sentinel of this.#sentinels) {
      if (sentinel.value !== number) continue
      this.quality = sentinel.code
      return null
    }
    if (quantity === 'switch') {
      if (number !== 0 && number !== 1) return 'unreadable-value'
      this.value = number
      return null
    }
    if (unit === null) return 'no-unit'
    const value = toSi(number, unit)
    // Text such as 1E999 overflows: no number we can keep, and certainly no measured value.
    if (!Number.isFinite(value)) return 'unreadable-value'
    this.value = value
    if (this.#numbers.spaced) this.doubt = 'spaced'
    if (quantity === 'pressure') {
      if (value > 0 && value >= PLAUSIBLE.pressure.min && value <= PLAUSIBLE.pressure.max) return null
      this.quality = SUSPECT
      this.doubt = value === 0 ? 'zero' : value < 0 ? 'negative' : 'ceiling'
    } else if (quantity === 'temperature') {
      if (value >= PLAUSIBLE.temperature.min && value <= PLAUSIBLE.temperature.max) return null
      // An open thermocouple or resistance sensor reads full scale; a cold value has no such plain cause.
      this.quality = value > PLAUSIBLE.temperature.max ? FAULT : SUSPECT
      this.doubt = value > PLAUSIBLE.temperature.max ? 'open-sensor' : 'ceiling'
    }
    return null
  }

  #other(text: string, quantity: Quantity, unit: Unit | null): CellFault | null {
    if (text === '') {
      this.quality = NO_SIGNAL
      return null
    }
    const first = text.charCodeAt(0)
    if (first === 60 || first === 62) {
      const rest = text.slice(text.charCodeAt(1) === 61 ? 2 : 1).trim()
      const bound = this.#numbers.read(rest)
      if (!Number.isNaN(bound)) {
        if (unit === null) return 'no-unit'
        const si = toSi(bound, unit)
        if (!Number.isFinite(si)) return 'unreadable-value'
        this.bound = si
        this.quality = first === 62 ? OVER : UNDER
        return null
      }
      const inner = this.#numberWithUnit(rest, quantity)
      if (inner !== null) {
        if (inner === 'unknown-unit') return inner
        this.bound = this.value
        this.value = Number.NaN
        this.doubt = null
        this.quality = first === 62 ? OVER : UNDER
        return null
      }
    }
    const meaning = this.#words.lookUp(text)
    if (meaning !== null) return this.#word(meaning, quantity)
    if (isCutNumber(text)) return 'unreadable-value'
    const withUnit = this.#numberWithUnit(text, quantity)
    if (withUnit !== null) return withUnit === 'unknown-unit' ? withUnit : null
    return /^[+-]?[\d.,]/.test(text) ? 'unreadable-value' : 'unknown-word'
  }

  #word(meaning: Quality | 'ok' | 'on', quantity: Quantity): CellFault | null {
    if (quantity === 'switch' && (meaning === 'on' || meaning === 'off')) {
      this.value = meaning === 'on' ? 1 : 0
      return null
    }
    if (meaning === 'ok' || meaning === 'on') return 'unknown-word'
    this.quality = meaning === 'off' ? OFF : qualityCode(meaning)
    return null
  }

  /** A number followed by its unit, `3.2E-08 mbar`. null: the text is not of that shape. */
  #numberWithUnit(text: string, quantity: Quantity): 'read' | 'unknown-unit' | null {
    const match = /^([+-]?[\d.,]+(?:[eEdD][+-]?\d+)?)\s*([^\d\s.,;+-].{0,15})$/.exec(text)
    if (match === null) return null
    const number = this.#numbers.read(match[1] as string)
    if (Number.isNaN(number)) return null
    const token = (match[2] as string).trim()
    const reading = readUnit(token)
    const unit = reading.kind === 'unit' ? reading.unit : this.#unitWord(token)
    if (unit === null || unit === 'leave-out' || !unitFits(quantity, unit)) {
      this.badUnit = token
      return 'unknown-unit'
    }
    this.cellUnit = unit
    return this.#number(number, quantity, unit) === null ? 'read' : null
  }
}
