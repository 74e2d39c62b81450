import type { Block } from './block.ts'
import type { Fault } from './tally.ts'

type LineFault = 'too-long' | 'damaged' | 'broken-quote' | 'field-count' | 'partial-last-line'

function lineFault(code: LineFault, found: string, expected: string): Fault {
  const mend =
    code === 'partial-last-line'
      ? 'The logger was cut off while writing. Nothing needs doing; the line is left out.'
      : 'Compare with the lines around it in the original; the rest of the file is read without it.'
  return { code, column: null, found, expected, mend }
}

export const TOO_LONG = lineFault(
  'too-long',
  'a line of more than a million characters',
  'short lines, one row each',
)

export const NUL_BYTES = lineFault('damaged', 'NUL bytes, as a disk fault leaves them', 'text')

export const OPEN_QUOTE = lineFault(
  'broken-quote',
  'a quotation mark that is not closed',
  'quotation marks in pairs',
)

/** A last line that was cut while it was written. */
export function cutLine({ fieldCount }: Block): Fault {
  return lineFault(
    'partial-last-line',
    'a last line that stops in the middle',
    `${fieldCount} whole fields and a line end`,
  )
}

/** A line with fewer or more fields than its header. */
export function wrongFieldCount(fields: readonly string[], { fieldCount }: Block): Fault {
  return lineFault('field-count', `${fields.length} fields`, `${fieldCount} fields, as in the header`)
}

/** A line whose decimal commas cannot be told from the commas between its fields. */
export function unclearCommas(found: string, { fieldCount }: Block): Fault {
  return lineFault(
    'field-count',
    found,
    `${fieldCount} fields in one way only: decimal points, quoted numbers, or semicolons between the fields`,
  )
}
