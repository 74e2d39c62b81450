import Papa from 'papaparse'
import type { Separator } from '../schemas/source-profile.ts'

export type SplitResult =
  | { kind: 'fields'; fields: string[] }
  /** A quoted cell is still open at the end of the text. */
  | { kind: 'open-quote' }
  /** Quotes that RFC 4180 does not allow, such as text after a closing quote. */
  | { kind: 'bad-quotes' }

/**
 * Splits one record. Without a quote there is nothing for the CSV parser to do beyond cutting at the separator, so
 * that is done directly; with one, papaparse decides.
 */
export function splitFields(record: string, separator: Separator): SplitResult {
  if (record.indexOf('"') === -1) {
    if (separator === ' ') return { kind: 'fields', fields: record.trim().split(/[ \t]+/) }
    return { kind: 'fields', fields: record.split(separator) }
  }
  const text = separator === ' ' ? record.trim().replace(/ +/g, ' ') : record
  const parsed = Papa.parse<string[]>(text, {
    delimiter: separator,
    newline: '\u0000' as '\n',
    quoteChar: '"',
    escapeChar: '"',
  })
  for (const error of parsed.errors) {
    if (error.code === 'MissingQuotes') return { kind: 'open-quote' }
    if (error.code === 'InvalidQuotes') return { kind: 'bad-quotes' }
  }
  return { kind: 'fields', fields: parsed.data[0] ?? [''] }
}

/** Fields of a single line, as well as they can be told: for looking at the head before the rules are settled. */
export function splitLoosely(line: string, separator: Separator): string[] {
  const result = splitFields(line, separator)
  return result.kind === 'fields' ? result.fields : line.split(separator)
}
