import type { Separator } from '../schemas/source-profile.ts'
import { splitFields } from './fields.ts'

/** A quoted cell that runs over more lines than this was never closed. */
const MAX_LINES = 50
const MAX_CHARS = 64 * 1024

export interface PlainLine {
  text: string
  line: number
  terminated: boolean
}

/** Lines that belong together so far, since a quoted cell is still open at the end of the last. */
export class OpenRecord {
  readonly lines: PlainLine[]
  #text: string

  constructor(first: PlainLine) {
    this.lines = [first]
    this.#text = first.text
  }

  /**
   * Adds the next line. `fields`: the record is whole; `open`: it goes on; `broken`: the quotation mark of the first
   * line was never meant to be closed, and the lines after it stand for themselves. The line is part of `lines` in
   * the first two cases only.
   */
  add(next: PlainLine, separator: Separator, fieldCount: number): string[] | 'open' | 'broken' {
    const text = `${this.#text}\n${next.text}`
    const split = splitFields(text, separator)
    if (split.kind === 'fields') {
      if (split.fields.length !== fieldCount) return 'broken'
      this.lines.push(next)
      return split.fields
    }
    if (split.kind === 'bad-quotes' || this.lines.length >= MAX_LINES || text.length > MAX_CHARS)
      return 'broken'
    const alone = splitFields(next.text, separator)
    if (alone.kind === 'fields' && alone.fields.length === fieldCount && /^\s*"?\d/.test(next.text))
      return 'broken'
    this.lines.push(next)
    this.#text = text
    return 'open'
  }
}
