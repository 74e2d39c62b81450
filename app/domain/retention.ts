/** What a deletion by policy has on paper: the list it was agreed to with, and what became of each line. */
import { z } from 'zod'
import { PermitPolicySchema } from './permit-policy.ts'
import { PERMIT_STATES } from './permit-words.ts'

const DAY_MS = 86_400_000
const stored = z.iso.datetime().nullable()

export const ManifestEntrySchema = z.object({
  number: z.string(),
  state: z.enum(PERMIT_STATES),
  segments: z.array(z.string()),
  windowFrom: stored,
  windowTo: stored,
  endedAt: stored,
  /** Rows and photos that go with it. */
  counts: z.record(z.string(), z.number().int().min(0)),
  /** Of the exported content, hexadecimal. */
  sha256: z.string().length(64),
  /** When it was deleted; null while it is there. */
  deletedAt: stored,
  /** Why it was left where it is, though it was on the list; empty otherwise. */
  left: z.string(),
})
export type ManifestEntry = z.infer<typeof ManifestEntrySchema>

export const ManifestSchema = z.object({
  /** Ended before this. */
  before: z.iso.datetime(),
  policy: PermitPolicySchema,
  permits: z.array(ManifestEntrySchema),
})
export type Manifest = z.infer<typeof ManifestSchema>

/** Permits that ended before this may be deleted: so many times 24 hours ago. */
export function deletableBefore(keepDays: number, now: Date): Date {
  return new Date(now.getTime() - keepDays * DAY_MS)
}
