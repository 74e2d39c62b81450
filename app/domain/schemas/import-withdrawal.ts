import { z } from 'zod'

const reason = (words: string) => z.string().trim().min(5, words).max(1000)

/** One part of withdrawing an import: asking, agreeing, turning down, doing it. */
export const ImportWithdrawalSchema = z.discriminatedUnion(
  'intent',
  [
    z.object({
      intent: z.literal('ask'),
      reason: reason(
        'Say what is wrong with the import, in five letters at least: it is kept with its readings.',
      ),
    }),
    z.object({ intent: z.literal('agree') }),
    z.object({ intent: z.literal('refuse'), refusal: reason('Say why not, in five letters at least.') }),
    z.object({ intent: z.literal('withdraw') }),
  ],
  { error: 'Choose to ask for it, to agree, to turn it down, or to withdraw.' },
)
