/**
 * What somebody typed into a permit's form and what has not been saved, kept in this browser: a session may end or the
 * network be away before it is. One store for each permit and person, so that nobody is offered another's text.
 */
import type { PermitFormValues } from '#app/domain/permit-form-values.ts'

export interface FormBasis {
  /** Revision and version of the permit that the form was filled from. */
  revision: number
  version: number
}

export interface KeptText {
  basis: FormBasis
  /** The product's time when the page was opened on which it was typed, UTC ISO 8601. */
  at: string
  values: PermitFormValues
}

function keyOf(number: string, personId: number): string {
  return `ebbline.permit.${number}.${personId}`
}

/** The browser may refuse to keep anything, in a private window for one; then nothing is kept and nothing breaks. */
function guarded<Result>(work: () => Result, otherwise: Result): Result {
  try {
    return work()
  } catch {
    return otherwise
  }
}

/** @returns whether it is kept */
export function keepText(number: string, personId: number, kept: KeptText): boolean {
  return guarded(() => {
    localStorage.setItem(keyOf(number, personId), JSON.stringify(kept))
    return true
  }, false)
}

export function forgetText(number: string, personId: number): void {
  guarded(() => localStorage.removeItem(keyOf(number, personId)), undefined)
}

/** What is kept, or null. What no longer has the form's shape counts as nothing. */
export function keptText(number: string, personId: number, like: PermitFormValues): KeptText | null {
  const stored = guarded(() => localStorage.getItem(keyOf(number, personId)), null)
  if (stored === null) return null
  const read: unknown = guarded(() => JSON.parse(stored), null)
  return isKept(read, like) ? read : null
}

function isKept(read: unknown, like: PermitFormValues): read is KeptText {
  if (typeof read !== 'object' || read === null) return false
  const { basis, at, values } = read as Partial<KeptText>
  if (typeof at !== 'string' || typeof basis?.revision !== 'number' || typeof basis.version !== 'number')
    return false
  if (typeof values !== 'object' || values === null) return false
  return (Object.keys(like) as (keyof PermitFormValues)[]).every(
    (key) =>
      typeof values[key] === typeof like[key] && Array.isArray(values[key]) === Array.isArray(like[key]),
  )
}
