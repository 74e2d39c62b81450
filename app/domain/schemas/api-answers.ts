/**
 * What the API takes in its headers and gives back. Routes and the served description of the API are made from these
 * same schemas, so that neither can say what the other does not do.
 */
import { z } from 'zod'
import { IMPORT_STATES } from '../imports.ts'

const count = (description: string) => z.int().min(0).meta({ description })

/** The header Idempotency-Key of a post. */
export const RequestKeySchema = z
  .string()
  .regex(/^[\x21-\x7e]{1,120}$/)
  .meta({
    description:
      'A text of your own for each post, such as a random UUID. A post that is repeated carries the same one again and changes nothing.',
  })

const ImportIdSchema = z.int().min(1).meta({
  description: 'Number of the import, under which the log intake shows it: /intake/{importId}.',
})

/** Answer to posted readings. */
export const PostAnswerSchema = z.object({
  importId: ImportIdSchema,
  stored: count('Readings stored.'),
  held: count('Readings that were held already with the same value.'),
  conflicting: count('Stored beside a different reading of the same channel and instant; both are marked.'),
  flagged: count(
    'Stored, but not as measured values: dated ahead, implausible, or unlike another of the post.',
  ),
  skipped: count('Left out: repeats within the post, and channels that the register says to ignore.'),
})

/** Answer to a sent file. */
export const FileAnswerSchema = z.object({
  importId: ImportIdSchema,
  state: z.enum(IMPORT_STATES).meta({
    description:
      'read: waits for a person. reading: large, and is being read. accepted: the same bytes were taken in before.',
  }),
  again: z.boolean().meta({ description: 'The same bytes had come before; nothing was added.' }),
  href: z.string().meta({ description: 'Page of the import.' }),
})

const problemMembers = {
  type: z.literal('about:blank'),
  title: z.string().meta({ description: 'Reason phrase of the status.' }),
  status: z.int().min(400).max(599),
  code: z.string().meta({ description: 'Stable word for programs, such as bad-input or too-large.' }),
  detail: z
    .string()
    .meta({ description: 'What was found, what was expected and how to mend it, for a person.' }),
}

const findingMembers = {
  found: z.string(),
  expected: z.string(),
  mend: z.string(),
}

/** Problem details (RFC 9457) of whatever goes wrong. */
export const ProblemSchema = z.object(problemMembers)

/** One thing that is wrong with a post. */
const PostFaultSchema = z.object({
  index: z.int().min(0).nullable().meta({
    description: 'Reading in the list, counted from 0; null when it concerns the post as a whole.',
  }),
  field: z.string(),
  ...findingMembers,
})

/** Problem details of a post that has faults. */
export const PostProblemSchema = z.object({
  ...problemMembers,
  errorTotal: z.int().min(1).optional(),
  errors: z
    .array(PostFaultSchema)
    .optional()
    .meta({ description: 'The first faults; errorTotal counts all.' }),
})

/** Problem details of a file that is kept and from which nothing can be taken. */
export const FileProblemSchema = z.object({
  ...problemMembers,
  importId: ImportIdSchema.optional(),
  errors: z
    .array(
      z.object({
        code: z.string(),
        line: z.int().min(1).nullable().meta({ description: 'Line of the file, counted from 1.' }),
        column: z.int().min(1).nullable().meta({ description: 'Field of the line, counted from 1.' }),
        ...findingMembers,
      }),
    )
    .optional(),
})

export type PostAnswer = z.infer<typeof PostAnswerSchema>
export type FileAnswer = z.infer<typeof FileAnswerSchema>
export type Problem = z.infer<typeof ProblemSchema>
