import { SEPARATORS, type Separator, type SourceProfile } from '../schemas/source-profile.ts'
import { splitLoosely } from './fields.ts'
import { directiveSeparator, isComment } from './line-kinds.ts'

/** A line of the head with its number in the file. */
export interface HeadLine {
  text: string
  line: number
}

export interface SeparatorFinding {
  separator: Separator
  /** Fields of most lines. */
  fieldCount: number
  departsFromProfile: boolean
}

const ORDER: readonly Separator[] = ['\t', ';', '|', ',', ' ']

/**
 * The separator under which most lines have the same number of fields and no field still holds another separator.
 * A `sep=` line decides by itself; the profile decides unless the file plainly is otherwise. Null: no table at all.
 */
export function sniffSeparator(head: readonly HeadLine[], profile: SourceProfile): SeparatorFinding | null {
  let directive: Separator | null = null
  const rows: string[] = []
  for (const { text } of head.slice(0, 200)) {
    const named = directiveSeparator(text)
    if (named !== null && (SEPARATORS as readonly string[]).includes(named)) directive = named as Separator
    else if (text.trim() !== '' && !isComment(text, null) && !text.includes('\u0000')) rows.push(text)
  }
  if (rows.length === 0) return null
  const scores = ORDER.map((separator) => ({ separator, ...score(rows, separator) }))
  const by = (separator: Separator) => scores.find((entry) => entry.separator === separator)
  if (directive !== null) {
    const own = by(directive)
    if (own !== undefined && own.fieldCount >= 2)
      return {
        separator: directive,
        fieldCount: own.fieldCount,
        departsFromProfile: profile.separator !== null && profile.separator !== directive,
      }
  }
  let best = scores[0] as (typeof scores)[number]
  for (const entry of scores) {
    // Blanks stand inside dates and names too: they only count when nothing else separates.
    if (entry.separator === ' ' && best.score >= 0.3) continue
    if (entry.score > best.score + 1e-9) best = entry
  }
  if (profile.separator !== null) {
    const own = by(profile.separator)
    if (own !== undefined && own.fieldCount >= 2 && own.score >= 0.6 * best.score)
      return { separator: profile.separator, fieldCount: own.fieldCount, departsFromProfile: false }
  }
  if (best.fieldCount < 2 || best.score < 0.25) return null
  return {
    separator: best.separator,
    fieldCount: best.fieldCount,
    departsFromProfile: profile.separator !== null && profile.separator !== best.separator,
  }
}

function score(rows: readonly string[], separator: Separator): { score: number; fieldCount: number } {
  const counts = new Map<number, number>()
  let cells = 0
  let clean = 0
  for (const row of rows) {
    const fields = splitLoosely(row, separator)
    counts.set(fields.length, (counts.get(fields.length) ?? 0) + 1)
    if (fields.length < 2) continue
    for (const field of fields) {
      cells += 1
      if (!/[;\t|]/.test(field) && (!field.includes(',') || /^\s*[<>]?=?\s*[+-]?[\d.' ]*,\d+/.test(field)))
        clean += 1
    }
  }
  let fieldCount = 1
  let most = 0
  for (const [count, times] of counts) {
    if (count >= 2 && times > most) {
      most = times
      fieldCount = count
    }
  }
  if (cells === 0) return { score: 0, fieldCount: 1 }
  return { score: (most / rows.length) * (clean / cells), fieldCount }
}
