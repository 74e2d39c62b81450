import type { Quality } from '../readings.ts'
import { plainWord } from './text.ts'

/** What a word in a value or status cell means. `ok` and `on` are no qualities: they say the number counts. */
export type WordMeaning = Quality | 'ok' | 'on'

/** English words and marks that gauge controllers commonly write (common practice, no source). */
const COMMON: Record<string, WordMeaning> = {
  over: 'over-range',
  or: 'over-range',
  'over range': 'over-range',
  'over-range': 'over-range',
  overrange: 'over-range',
  overload: 'over-range',
  ovf: 'over-range',
  ol: 'over-range',
  '+ol': 'over-range',
  hi: 'over-range',
  inf: 'over-range',
  '+inf': 'over-range',
  under: 'under-range',
  ur: 'under-range',
  'under range': 'under-range',
  'under-range': 'under-range',
  underrange: 'under-range',
  '-ol': 'under-range',
  lo: 'under-range',
  off: 'off',
  'gauge off': 'off',
  'sensor off': 'off',
  'filament off': 'off',
  'fil off': 'off',
  'emission off': 'off',
  'no emission': 'off',
  'hv off': 'off',
  starting: 'starting',
  start: 'starting',
  'warming up': 'starting',
  'warm up': 'starting',
  degas: 'degas',
  degassing: 'degas',
  'degas running': 'degas',
  fault: 'fault',
  err: 'fault',
  error: 'fault',
  fail: 'fault',
  failed: 'fault',
  broken: 'fault',
  'broken filament': 'fault',
  'filament broken': 'fault',
  open: 'fault',
  short: 'fault',
  '#div/0!': 'fault',
  '': 'no-signal',
  nan: 'no-signal',
  'n/a': 'no-signal',
  '#n/a': 'no-signal',
  na: 'no-signal',
  null: 'no-signal',
  none: 'no-signal',
  'no signal': 'no-signal',
  'no data': 'no-signal',
  'no sensor': 'no-signal',
  ok: 'ok',
  good: 'ok',
  valid: 'ok',
  on: 'on',
}

export class WordBook {
  readonly #own: Map<string, WordMeaning>

  constructor(words: Record<string, WordMeaning>) {
    this.#own = new Map(Object.entries(words).map(([word, meaning]) => [plainWord(word), meaning]))
  }

  /** Meaning of a cell's text; the source's own words go before the common ones; null for an unknown word. */
  lookUp(text: string): WordMeaning | null {
    const word = plainWord(text)
    const own = this.#own.get(word)
    if (own !== undefined) return own
    if (Object.hasOwn(COMMON, word)) return COMMON[word] ?? null
    if (/^(?:-{2,}|—+|\*+|\?{2,}|#{2,}|_{2,})$/.test(word)) return 'no-signal'
    return null
  }
}

/** Qualities under which a number beside the word is still a measured value, to be drawn faintly. */
export function keepsValue(quality: Quality): boolean {
  return quality === 'starting' || quality === 'degas' || quality === 'suspect' || quality === 'manual'
}
