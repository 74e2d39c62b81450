/** Rulings of officers on conflicts of the demo's permits. Those that are live or asked for have none to be ruled on. */
import type { permitRuling } from '../../app/db/schema/index.ts'
import { at } from '../demo-time.ts'
import { PERSON_ID } from '../people.ts'
import type { DemoPermit } from '../scenario/permits.ts'
import type { Signatures } from './signatures.ts'

/** Before work went on at SG-15, whose smoke detector had failed. */
const RULING = {
  number: 'HSP-2025-045',
  key: 'K9:detector:bay-14',
  facts:
    'The smoke detector of bay 14 is out of order since 2025-11-06 10:15 (UTC+01:00), and SG-15 is heated beside it.',
  text: 'May go on once the spare detector hangs and has been tried; until then somebody stays with an extinguisher and a radio.',
  by: 'ione',
  at: at('2025-11-06 10:50'),
} as const

export function rulingRows(
  { number }: DemoPermit,
  permitId: number,
  { sign }: Signatures,
): (typeof permitRuling.$inferInsert)[] {
  if (number !== RULING.number) return []
  const { key, facts, text, by, at: ruledAt } = RULING
  return [
    {
      permitId,
      conflictKey: key,
      facts,
      allowed: true,
      text,
      ruledBy: PERSON_ID[by],
      ruledAt,
      signedActId: sign(by, ruledAt, 'rule on a conflict of a permit', { kind: 'permit', id: number }),
    },
  ]
}
