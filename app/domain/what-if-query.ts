/** A trial as the query of an address, both ways. A link holds every number, so that it says the same next year. */
import {
  numberText,
  usualState,
  type WhatIfField,
  type WhatIfGround,
  type WhatIfKey,
  type WhatIfMode,
  type WhatIfState,
  type WhatIfWall,
  whatIfFields,
} from './what-if.ts'

export interface AskedWhatIf {
  state: WhatIfState
  /** What was typed where it could not be used, to show it again. */
  typed: Partial<Record<WhatIfKey, string>>
  /** What is wrong with it, and what is used instead. */
  errors: Partial<Record<WhatIfKey, string>>
}

const MODES: readonly string[] = ['pump-down', 'bake'] satisfies WhatIfMode[]
const WALLS: readonly string[] = ['wet', 'dry'] satisfies WhatIfWall[]
const LONGEST_ECHO = 40

/** One number as somebody typed it: decimal point or comma, `1e-7` or `0.0000001`. */
export function readWhatIfNumber(
  field: WhatIfField,
  text: string,
): { value: number; error: null } | { value: null; error: string } {
  const typed = text.trim()
  // What the field itself shows for the register's value is that value, with all the figures it has there.
  if (typed === numberText(field.usual)) return { value: field.usual, error: null }
  const value = typed === '' ? Number.NaN : Number(typed.replace(',', '.'))
  if (Number.isFinite(value) && value >= field.min && value <= field.max) return { value, error: null }
  const found = typed === '' ? 'Nothing was given' : `“${typed.slice(0, LONGEST_ECHO)}” was given`
  const range = `${numberText(field.min)} to ${numberText(field.max)} ${field.unit}`
  return { value: null, error: `${found}; expected a number from ${range}, written like 0.5 or 2e-7.` }
}

/** Reads a trial from a query. What is missing is the register's; what cannot be used is named, and so replaced too. */
export function readWhatIf(ground: WhatIfGround, query: URLSearchParams): AskedWhatIf {
  const state = usualState(ground)
  const asked: AskedWhatIf = { state, typed: {}, errors: {} }
  const mode = query.get('mode')
  if (mode !== null && MODES.includes(mode)) state.mode = mode as WhatIfMode
  const wall = query.get('wall')
  if (wall !== null && WALLS.includes(wall)) state.wall = wall as WhatIfWall
  for (const field of whatIfFields(ground)) {
    const text = query.get(field.key)
    if (text === null) continue
    const { value, error } = readWhatIfNumber(field, text)
    if (error === null) state.numbers[field.key] = value
    else {
      asked.typed[field.key] = text
      asked.errors[field.key] = `${error} Used instead: ${numberText(field.usual)} ${field.unit}.`
    }
  }
  return asked
}

/** The query that reproduces a trial; empty for the one that changes nothing. */
export function whatIfQuery(ground: WhatIfGround, state: WhatIfState): string {
  const query = (from: WhatIfState) =>
    new URLSearchParams([
      ['mode', from.mode],
      ['wall', from.wall],
      ...whatIfFields(ground).map(({ key }): [string, string] => [key, numberText(from.numbers[key])]),
    ]).toString()
  const asked = query(state)
  return asked === query(usualState(ground)) ? '' : asked
}
