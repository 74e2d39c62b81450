/** Forms of thresholds: adopting a value for this site, ending it, and the size of a bay. */
import { z } from 'zod'
import { isThresholdKey, THRESHOLD_KEYS, THRESHOLDS } from '../hazard-thresholds.ts'
import { siteInstant } from './instant.ts'
import { numberValue, textValue } from './register-values.ts'

const STALE = 'This page is not whole any more. Load it again.'
const password = z.string({ error: 'Sign with your own password.' }).min(1, 'Sign with your own password.')
/** Id of the row that the page showed as holding; 0 for none. */
const seen = z.coerce.number({ error: STALE }).int(STALE).min(0, STALE)
const reason = z
  .string({ error: 'Say in a sentence why.' })
  .trim()
  .min(10, 'Say in a sentence why.')
  .max(500, 'At most 500 characters.')
const key = z.enum(THRESHOLD_KEYS, { error: 'Choose a threshold of the table.' })

/** Space that a bay can be taken for, m³. */
const BAY_VOLUME = { min: 10, max: 1_000_000, unit: 'm³' }

/**
 * What an officer may do on the page of thresholds.
 *
 * @param zone zone in which the times are typed
 * @param typedKey the threshold that the form names: its bounds are those of the value
 */
export function thresholdActSchema(zone: string, typedKey: string | undefined) {
  const facts = isThresholdKey(typedKey) ? THRESHOLDS[typedKey] : null
  const bounds =
    facts === null ? { min: 0, max: 1e6, unit: '' } : { min: facts.least, max: facts.most, unit: facts.unit }
  return z.discriminatedUnion(
    'act',
    [
      z.object({
        act: z.literal('adopt'),
        key,
        seen,
        value: numberValue(bounds).transform(Number),
        source: textValue({ max: 200, what: 'the rule, standard or ruling that it comes from' }),
        edition: textValue({ max: 80, what: 'its edition or date' }),
        reason,
        reviewAt: siteInstant(zone),
        password,
      }),
      z.object({ act: z.literal('end'), key, seen, reason, password }),
      z.object({
        act: z.literal('bay-volume'),
        seen,
        volumeM3: numberValue(BAY_VOLUME).transform(Number),
        reason,
        password,
      }),
    ],
    { error: 'Choose what is to be done.' },
  )
}
type ThresholdAct = z.infer<ReturnType<typeof thresholdActSchema>>
export type ThresholdAdoption = Extract<ThresholdAct, { act: 'adopt' }>
export type ThresholdEnd = Extract<ThresholdAct, { act: 'end' }>
export type BayVolumeForm = Extract<ThresholdAct, { act: 'bay-volume' }>
