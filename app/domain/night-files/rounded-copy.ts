import { powerText } from '../power-text.ts'
import { QUANTITIES, type Quantity } from '../readings.ts'

/** A reading of a file beside the stored one of the same channel and instant. */
export interface StoredPair {
  channel: string
  quantity: Quantity
  atMs: number
  /** In the unit of the quantity. */
  inFile: number
  stored: number
}

/** What a file is in relation to readings that are held already. */
export interface CopyFinding {
  /** `rounded-copy`: the file holds nothing but the stored values with fewer digits. */
  kind: 'rounded-copy' | 'same' | 'finer' | 'different' | 'no-overlap'
  pairs: number
  /** Pairs whose values are equal as they stand. */
  equal: number
  /** Pairs in which the file has the stored value with fewer digits. */
  rounded: number
  /** Digits of the file's mantissas at most. */
  digits: number
  /** Three pairs to show. */
  examples: { channel: string; atMs: number; inFile: string; stored: string }[]
}

/** A share of pairs that may differ otherwise: spreadsheets turn single cells into dates and the like. */
const STRAY_SHARE = 0.02
/** Fewer pairs than these prove nothing. */
const FEWEST_PAIRS = 20
const MOST_DIGITS = 12
const EXAMPLES = 3

/**
 * Compares the usable values of a file with what is stored for the same channels and instants. A copy that somebody
 * opened and saved in a spreadsheet has the same instants and fewer digits; its readings would stand beside the
 * better ones as conflicts. Values whose stored form itself has few digits count as equal, not as rounded.
 */
export function compareWithStored(pairs: Iterable<StoredPair>): CopyFinding {
  let count = 0
  let equal = 0
  let rounded = 0
  let finer = 0
  let digits = 0
  const examples: CopyFinding['examples'] = []
  for (const pair of pairs) {
    count += 1
    const { inFile, stored, quantity } = pair
    const length = digitsOf(inFile)
    digits = Math.max(digits, length)
    if (isSame(inFile, stored)) equal += 1
    else if (length < digitsOf(stored) && isRounding(inFile, stored, length)) {
      rounded += 1
      if (examples.length < EXAMPLES)
        examples.push({
          channel: pair.channel,
          atMs: pair.atMs,
          inFile: shown(inFile, quantity),
          stored: shown(stored, quantity),
        })
    } else if (isRounding(stored, inFile, digitsOf(stored))) finer += 1
  }
  const rest = count - equal - rounded
  const strays = STRAY_SHARE * count
  let kind: CopyFinding['kind'] = 'different'
  if (count === 0) kind = 'no-overlap'
  else if (equal === count) kind = 'same'
  else if (count >= FEWEST_PAIRS && rest <= strays && rounded > strays) kind = 'rounded-copy'
  else if (count >= FEWEST_PAIRS && count - equal - finer <= strays) kind = 'finer'
  return { kind, pairs: count, equal, rounded, digits, examples }
}

/** Equal but for the last bits that a conversion of units leaves. */
function isSame(a: number, b: number): boolean {
  return a === b || Math.abs(a - b) <= 1e-12 * Math.abs(b)
}

/** Digits of the mantissa that a value needs. */
function digitsOf(value: number): number {
  for (let digits = 1; digits < MOST_DIGITS; digits += 1)
    if (isSame(Number(value.toPrecision(digits)), value)) return digits
  return MOST_DIGITS
}

/** Whether the one is the other cut or rounded to so many digits: a spreadsheet rounds, some exports cut. */
function isRounding(coarse: number, fine: number, digits: number): boolean {
  if (fine === 0 || Math.sign(coarse) !== Math.sign(fine)) return false
  const step = 10 ** (Math.floor(Math.log10(Math.abs(fine))) - digits + 1)
  // Half a step for rounding, a whole one for cutting; a hair more for the last bits.
  const off = Math.abs(coarse - fine)
  return off <= step * 0.5000001 || (Math.abs(coarse) < Math.abs(fine) && off < step)
}

function shown(value: number, quantity: Quantity): string {
  const { unit, logarithmic } = QUANTITIES[quantity]
  const figure = logarithmic ? powerText(value) : String(Number(value.toPrecision(6)))
  return unit === '' ? figure : `${figure} ${unit}`
}

/** What to tell a person about a rounded copy; null for any other file. */
export function copyText(finding: CopyFinding): string | null {
  if (finding.kind !== 'rounded-copy') return null
  const example = finding.examples
    .map(({ channel, inFile, stored }) => `${channel}: ${inFile} here, ${stored} held`)
    .join('; ')
  return `This is a copy with fewer digits: ${finding.rounded} of ${finding.pairs} readings stand here rounded to ${finding.digits} digits and are held in full (${example}). Nothing is gained by taking it in; discard it and keep the original.`
}
