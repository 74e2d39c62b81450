import { MAX_TEXT } from './limits.ts'

/**
 * A short copy of a piece of the file. A plain slice would keep the whole chunk it was cut from in memory for as
 * long as the report lives.
 */
export function detach(text: string): string {
  const cut = text.length > MAX_TEXT ? `${text.slice(0, MAX_TEXT)}…` : text
  return Array.from(cut).join('')
}

/** Lower case, single spaces, no outer blanks: the form in which words are compared. */
export function plainWord(text: string): string {
  return text
    .replace(/[\s\u00a0]+/g, ' ')
    .trim()
    .toLowerCase()
}

/** A number as a power of ten, such as `6.81 × 10⁻⁸`, for sentences that are shown as they stand. */
export function powerText(value: number): string {
  if (value === 0 || !Number.isFinite(value)) return String(value)
  const [mantissa = '', exponent = ''] = value.toExponential(2).split('e')
  const raised = Array.from(String(Number(exponent)), (sign) =>
    sign === '-' ? '⁻' : ('⁰¹²³⁴⁵⁶⁷⁸⁹'[Number(sign)] ?? ''),
  )
  return `${mantissa} × 10${raised.join('')}`
}
