/** What a sheet of paper is made of. Page and PDF are made from the same blocks, so that their words are the same. */
import type { Drawing } from './drawing.ts'

export type Block =
  | { kind: 'heading'; text: string }
  | { kind: 'text'; text: string; strong?: boolean; size?: number }
  /** Letters that are read from some metres away. */
  | { kind: 'big'; text: string; size: number }
  /** A frame around what must not be overlooked. */
  | { kind: 'notice'; title: string; text: string }
  | { kind: 'facts'; rows: [name: string, value: string][] }
  /** Columns share the width by their weights. Empty cells of `blank` rows are written by hand. */
  | {
      kind: 'table'
      name: string
      columns: Column[]
      rows: string[][]
      blank?: number
      rowHeight?: number
      whole?: boolean
    }
  | { kind: 'drawing'; drawing: Drawing; words: string }

export interface Column {
  title: string
  weight: number
}

export interface Sheet {
  key: 'suspended' | 'permit' | 'isolation' | 'sketch' | 'curve' | 'emergency' | 'sign-in'
  title: string
  blocks: Block[]
}

/** What stands at the head and foot of every sheet. */
export interface PaperFrame {
  site: string
  number: string
  /** Revision and version, and whether that version is the approved one. */
  revisionText: string
  printedText: string
  /** In large letters where the paper must not be taken for a permit that is live; null where it is live. */
  standing: string | null
  /** What the large letters mean, or until when it is live. */
  standingText: string
  code: string
  address: string
  qr: Drawing
  foot: string[]
}

export interface Paper {
  frame: PaperFrame
  sheets: Sheet[]
}

const RAISED = '⁰¹²³⁴⁵⁶⁷⁸⁹'
const LOWERED = '₀₁₂₃₄₅₆₇₈₉'

/** A stretch of text that is set in one way. */
export interface Run {
  text: string
  shift: 'none' | 'raised' | 'lowered'
}

function shiftOf(letter: string): { letter: string; shift: Run['shift'] } {
  if (letter === '⁻') return { letter: '−', shift: 'raised' }
  if (letter === '⁺') return { letter: '+', shift: 'raised' }
  const up = RAISED.indexOf(letter)
  if (up >= 0) return { letter: String(up), shift: 'raised' }
  const down = LOWERED.indexOf(letter)
  if (down >= 0) return { letter: String(down), shift: 'lowered' }
  return { letter, shift: 'none' }
}

/** A text as runs: raised and lowered figures become plain ones that are set smaller, since few typefaces have them. */
export function runsOf(text: string): Run[] {
  const runs: Run[] = []
  for (const one of text) {
    const { letter, shift } = shiftOf(one)
    const last = runs.at(-1)
    if (last?.shift === shift) last.text += letter
    else runs.push({ text: letter, shift })
  }
  return runs
}

const WORDS: readonly (readonly [RegExp, string])[] = [
  [/≥ ?/g, 'at least '],
  [/≤ ?/g, 'at most '],
  [/ ?→ ?/g, ' to '],
  [/≈ ?/g, 'about '],
  [/\u2002|\u2009|\u202f/g, '\u00a0'],
]

/** A text in letters that print: signs that the typeface lacks are said in words. */
export function printable(text: string): string {
  return WORDS.reduce((result, [sign, words]) => result.replaceAll(sign, words), text)
}

/** The same with every text in it made printable. */
export function allPrintable<Value>(value: Value): Value {
  if (typeof value === 'string') return printable(value) as Value
  if (Array.isArray(value)) return value.map(allPrintable) as Value
  if (typeof value !== 'object' || value === null) return value
  return Object.fromEntries(Object.entries(value).map(([name, each]) => [name, allPrintable(each)])) as Value
}
