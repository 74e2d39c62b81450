import type { SourceProfile } from '../schemas/source-profile.ts'
import type { Answer, ReadOut } from './types.ts'

/** One way to read a file that cannot be taken in as it stands, only to see whether it is a copy of what is held. */
export interface Trial {
  profile: SourceProfile
  answers: Answer[]
}

/** More ways than these are not tried. */
const MAX_TRIALS = 8

/**
 * Ways to read a file so that its values can be held against the stored ones. A file that is read as it stands has
 * one; one that lost its unit or whose dates are in doubt, as after a spreadsheet has saved it, has several: in each
 * the profile stands in for what the file does not say. No reading of a trial is ever stored.
 */
export function copyTrials(profile: SourceProfile, readOut: ReadOut): Trial[] {
  const { answers, questions, refusal, state } = readOut
  if (state === 'readable') return [{ profile, answers }]
  if (refusal !== null && (refusal.code !== 'no-unit' || profile.unit === null)) return []
  const loose = { ...profile, unitInFile: false }
  let trials: Answer[][] = [answers]
  for (const { id, kind, choices } of questions) {
    if (kind !== 'date-order' && kind !== 'unit' && kind !== 'decimal-mark') continue
    trials = trials.flatMap((given) => choices.map(({ value }) => [...given, { id, choice: value }]))
  }
  return trials.slice(0, MAX_TRIALS).map((given) => ({ profile: loose, answers: given }))
}
