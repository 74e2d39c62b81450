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
