/** Figures inside cautions: a number and its unit that stay on one line. */

const NO_BREAK = '\u00a0'

/**
 * A number with its unit, such as `28.6 kN`.
 *
 * @param digits after the point; as many as the number has, up to three, where none are given
 */
export function figure(value: number, unit: string, digits?: number): string {
  const text = digits === undefined ? String(Number(value.toFixed(3))) : value.toFixed(digits)
  return `${text}${NO_BREAK}${unit}`
}

/** Where formulas of the school-book come from. */
export const TEXTBOOK = 'textbook physics'
/** Where rules of thumb come from. */
export const PRACTICE = 'common practice, no source'
export const THIS_PERMIT = 'this permit'
export const REGISTER = 'the register'

/** Said in place of a figure while the permit lacks what it needs. */
export function notYet(what: string): string {
  return `not known until the permit says ${what}`
}

/** Names of segments in a sentence. */
export function named(segments: readonly { tag: string }[]): string {
  return segments.map(({ tag }) => tag).join(' and ')
}
