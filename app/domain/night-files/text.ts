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
