/** Every kind of work the worker does, what it needs to be told, and which of it recurs. */
import { z } from 'zod'
import type { Answer } from './night-files/types.ts'
import { ROLES } from './roles.ts'

/** Passed on as it was given; only what every answer has is looked at. */
const AnswerSchema = z.custom<Answer>(
  (value) => z.looseObject({ id: z.string(), choice: z.string() }).safeParse(value).success,
  'An answer has at least an id and a choice.',
)

export const JOB_PAYLOADS = {
  /** Makes the months ahead of the readings table. */
  'partition-readings': z.strictObject({}),
  /** Deletes sign-in sessions that have run out. */
  'purge-sessions': z.strictObject({}),
  /** In the demo: posts what the loggers of heated segments have to say since the last time. */
  'feed-demo': z.strictObject({}),
  /** Reads a large file that has been kept, with a person's answers to its questions. */
  'read-night-file': z.strictObject({
    importId: z.int().positive(),
    answers: z.array(AnswerSchema),
  }),
  /** Takes a large file in for the person who asked, with the roles they had when they did. */
  'take-in-night-file': z.strictObject({
    importId: z.int().positive(),
    actor: z.strictObject({ personId: z.int().positive(), name: z.string(), roles: z.array(z.enum(ROLES)) }),
  }),
  /** Looks which forecasts of record have come true or not. */
  'judge-forecasts': z.strictObject({}),
  /** Looks for places for the bakes of a schedule. */
  'solve-schedule': z.strictObject({ scheduleId: z.int().positive() }),
  /** Makes rollups anew where readings have changed. */
  'roll-up': z.strictObject({}),
  /** Notes where the bakes under way have left their plans or limits. */
  'note-deviations': z.strictObject({}),
  /** Looks through the permits for dangers, and for times that have passed. */
  'watch-permits': z.strictObject({}),
  /** Deletes finished jobs, and uploads that broke off, once nobody will ask about them. */
  'purge-leftovers': z.strictObject({}),
} as const satisfies Record<string, z.ZodType>

export type JobKind = keyof typeof JOB_PAYLOADS
export type JobPayload<Kind extends JobKind> = z.infer<(typeof JOB_PAYLOADS)[Kind]>

/** Whether the text names a kind this program knows. */
export function isJobKind(text: string): text is JobKind {
  return Object.hasOwn(JOB_PAYLOADS, text)
}

/** A job that recurs. It is due at whole multiples of its period, counted in UTC, by the product's time. */
export interface ScheduledTask {
  name: string
  kind: JobKind
  everySeconds: number
}

export const SCHEDULED_TASKS: readonly ScheduledTask[] = [
  // First: people wait for nothing more than for this.
  { name: 'watch-permits', kind: 'watch-permits', everySeconds: 60 },
  { name: 'partition-readings', kind: 'partition-readings', everySeconds: 6 * 3600 },
  { name: 'note-deviations', kind: 'note-deviations', everySeconds: 600 },
  // Whoever takes a file in asks for it at once; this is for live posts, typed readings and what a stop has left.
  { name: 'roll-up', kind: 'roll-up', everySeconds: 300 },
  { name: 'judge-forecasts', kind: 'judge-forecasts', everySeconds: 3600 },
  { name: 'purge-sessions', kind: 'purge-sessions', everySeconds: 3600 },
  { name: 'purge-leftovers', kind: 'purge-leftovers', everySeconds: 24 * 3600 },
]

/**
 * The newest due time at or before an instant. Times missed while the product was off, or jumped over by the demo
 * clock, are not made up for: housekeeping done once is done.
 */
export function lastDue(task: ScheduledTask, now: Date): Date {
  const period = task.everySeconds * 1000
  return new Date(Math.floor(now.getTime() / period) * period)
}

const FIRST_PAUSE_SECONDS = 5
const LONGEST_PAUSE_SECONDS = 600

/** Seconds until a job that has failed so many times is tried again: 5, 10, 20 … at most 600. */
export function pauseAfter(attempts: number): number {
  return Math.min(LONGEST_PAUSE_SECONDS, FIRST_PAUSE_SECONDS * 2 ** Math.max(0, attempts - 1))
}
