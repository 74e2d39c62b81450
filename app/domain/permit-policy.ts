/** What a site decides about its permits, and what the product proposes until it has. */
import { z } from 'zod'
import type { PermitPolicy } from './permit-facts.ts'

/** A day more than five years with two leap days in them; our own proposal, the law of the site may ask for more. */
const FIVE_YEARS_DAYS = 1827
/** Nobody sets less: rules on confined spaces ask for a year and a yearly look through the cancelled ones. */
const LEAST_KEEP_DAYS = 366
const MOST_KEEP_DAYS = 36_525

export const DEFAULT_PERMIT_POLICY: PermitPolicy = { extensionAllowed: true, keepDays: FIVE_YEARS_DAYS }

export const PermitPolicySchema = z.object({
  extensionAllowed: z.boolean(),
  keepDays: z.number().int().min(LEAST_KEEP_DAYS).max(MOST_KEEP_DAYS),
})
