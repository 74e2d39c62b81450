import type { FieldErrors } from '#app/domain/errors.ts'

/** What was typed into a form that was refused, by field; never a password. */
export type Typed = Readonly<Record<string, string>>

/** What an action answers when it could not do what was asked: a sentence, messages by field, and what was typed. */
export interface ActionFailure {
  ok: false
  message: string
  fields: FieldErrors
  /** Absent where the form was checked in the browser: its fields still hold what was typed. */
  typed?: Typed | undefined
}
