const DOT = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/
const COMMA = /^[+-]?(?:\d+,?\d*|,\d+)(?:[eE][+-]?\d+)?$/
const SUPERSCRIPTS = '⁰¹²³⁴⁵⁶⁷⁸⁹'

export type DecimalMark = '.' | ','

export interface NumberRules {
  decimalMark: DecimalMark
  thousandsMark: '.' | ',' | ' ' | "'" | null
  bareExponent: boolean
}

/** Reads numbers as one dialect writes them. Stateless but for `spaced`, which tells about the last number read. */
export class NumberReader {
  readonly rules: NumberRules
  /** Whether the last number had blanks inside its exponent. */
  spaced = false
  readonly #plain: RegExp
  readonly #grouped: RegExp | null

  constructor(rules: NumberRules) {
    this.rules = rules
    this.#plain = rules.decimalMark === ',' ? COMMA : DOT
    const mark = rules.thousandsMark
    const group = mark === null ? null : mark === '.' ? '\\.' : mark === ' ' ? '[ \\u00a0\\u202f]' : mark
    const point = rules.decimalMark === ',' ? ',' : '\\.'
    this.#grouped = group === null ? null : new RegExp(`^[+-]?\\d{1,3}(?:${group}\\d{3})+(?:${point}\\d*)?$`)
  }

  /** The number, or NaN when the text is none in this dialect. Never reads a part of the text. */
  read(text: string): number {
    this.spaced = false
    if (this.#plain.test(text)) return this.#convert(text)
    return this.#readRarer(text)
  }

  #convert(text: string): number {
    return this.rules.decimalMark === ',' ? Number(text.replace(',', '.')) : Number(text)
  }

  #readRarer(raw: string): number {
    let text = raw.trim()
    if (text === '' || !/\d/.test(text)) return Number.NaN
    text = text.replace(/\u2212/g, '-')
    if (this.#grouped?.test(text)) {
      const mark = this.rules.thousandsMark as string
      const bare = mark === ' ' ? text.replace(/[ \u00a0\u202f]/g, '') : text.split(mark).join('')
      return this.#convert(bare)
    }
    const powers = /^(.*?)\s*[×x*·]\s*10\s*(?:\^\s*)?([+-]?\d+|[⁺⁻]?[⁰¹²³⁴⁵⁶⁷⁸⁹]+)$/.exec(text)
    if (powers !== null) text = `${powers[1]}E${plainExponent(powers[2] as string)}`
    const lettered = /^([+-]?[\d.,]+)(\s*)[eEdD](\s*)([+-]?)(\s*)(\d+)$/.exec(text)
    if (lettered !== null) {
      this.spaced = `${lettered[2]}${lettered[3]}${lettered[5]}` !== ''
      text = `${lettered[1]}E${lettered[4]}${lettered[6]}`
    } else if (this.rules.bareExponent) {
      text = text.replace(/^([+-]?\d+[.,]?\d*)([+-]\d{1,3})$/, '$1E$2')
    }
    if (this.#plain.test(text)) return this.#convert(text)
    this.spaced = false
    return Number.NaN
  }
}

function plainExponent(text: string): string {
  return Array.from(text)
    .map((letter) => {
      if (letter === '⁻') return '-'
      if (letter === '⁺') return '+'
      const digit = SUPERSCRIPTS.indexOf(letter)
      return digit === -1 ? letter : String(digit)
    })
    .join('')
}

/** Whether a text is a number under some dialect: for telling data from headers before the dialect is known. */
export function looksNumeric(text: string): boolean {
  const trimmed = text.trim()
  return (
    /^[<>]?=?\s*[+-]?\d[\d.,' \u00a0]*(?:\s*[eEdD]\s*[+-]?\s*\d+)?$/.test(trimmed) ||
    /^[+-]?[.,]\d+/.test(trimmed)
  )
}

/**
 * What one cell says about the decimal mark: `.` or `,` when it can only be that, `either` for `1.013`, `both` for
 * `1.013,25`, null when it holds no mark.
 */
export function decimalEvidence(text: string): { mark: DecimalMark | 'both' | null; sure: boolean } {
  const trimmed = text.trim().replace(/^[<>]=?\s*/, '')
  const match = /^[+-]?(\d*)([.,])(\d+)([eEdD][+-]?\d+)?$/.exec(trimmed)
  if (match === null) {
    if (/^[+-]?\d{1,3}([.,])\d{3}(?:\1\d{3})*[.,]\d*$/.test(trimmed)) return { mark: 'both', sure: true }
    return { mark: null, sure: false }
  }
  const [, whole = '', mark, decimals = '', exponent] = match
  const couldGroup = exponent === undefined && decimals.length === 3 && /^[1-9]\d{0,2}$/.test(whole)
  return { mark: mark as DecimalMark, sure: !couldGroup }
}

/** Whether the text of a number stops in the middle, as in `3.2E-` or `6,`. */
export function isCutNumber(text: string): boolean {
  return /^[+-]?(?:\d+(?:[.,]\d*)?[eEdD][+-]?|\d+[.,]|)$/.test(text.trim()) && text.trim() !== ''
}
