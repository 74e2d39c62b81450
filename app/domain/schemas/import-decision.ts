import { z } from 'zod'

/** What a person decides about a file that waits: take it in, discard it, or answer its questions. */
export const ImportDecisionSchema = z.discriminatedUnion(
  'intent',
  [
    z.object({ intent: z.literal('accept') }),
    z.object({
      intent: z.literal('discard'),
      reason: z.string().trim().min(3, 'Say in a few words why the file is not wanted.').max(1000),
    }),
    z.looseObject({ intent: z.literal('answer') }),
  ],
  { error: 'Choose to take the file in, to discard it, or to answer its questions.' },
)

/** Prefix of the fields that answer questions, before the question's id. */
export const ANSWER_PREFIX = 'answer:'

/** Prefix of the fields in which an answer is typed; what stands there counts instead of the choice. */
export const TYPED_PREFIX = 'typed-answer:'

/** The answers of a sent form, one per question; empty fields are none. */
export function sentAnswers(form: Readonly<Record<string, unknown>>): { id: string; choice: string }[] {
  const answers = new Map<string, string>()
  for (const prefix of [ANSWER_PREFIX, TYPED_PREFIX]) {
    for (const [name, value] of Object.entries(form)) {
      if (!name.startsWith(prefix) || typeof value !== 'string' || value.trim() === '') continue
      answers.set(name.slice(prefix.length), value.trim())
    }
  }
  return Array.from(answers, ([id, choice]) => ({ id, choice }))
}
