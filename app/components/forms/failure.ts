import type { FieldErrors } from '#app/domain/errors.ts'

/** What an action answers when it could not do what was asked: a sentence, and messages by field. */
export interface ActionFailure {
  ok: false
  message: string
  fields: FieldErrors
}
