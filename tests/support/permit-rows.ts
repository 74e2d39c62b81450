/** A permit put straight into the tables in whatever state a test wants, past the acts that would lead there. */
import type { DbOrTx } from '#app/db/client.server.ts'
import { insertPermit } from '#app/db/queries/permits.server.ts'
import type { permit } from '#app/db/schema/index.ts'
import type { PermitContent } from '#app/domain/permit-content.ts'
import { after, MORNING } from './clock.ts'
import { fullContent } from './permit-content.ts'

let serial = 0

/**
 * A permit whose window runs from an hour before the morning for four days, live until twelve hours after it where its
 * state is one in which time counts.
 *
 * @returns its number and id
 */
export async function createPermitRow(
  db: DbOrTx,
  options: Partial<typeof permit.$inferInsert> & { createdBy: number; content?: Partial<PermitContent> },
): Promise<{ id: number; number: string }> {
  serial += 1
  const { content, ...row } = options
  const number = row.number ?? `HSP-2026-${String(500 + serial)}`
  const live = row.state === 'issued' || row.state === 'suspended' || row.state === 'expired'
  const id = await insertPermit(
    db,
    {
      number,
      shortCode: `T${String(serial).padStart(6, '0')}`,
      state: 'approved',
      createdAt: after(MORNING, -7200),
      windowFrom: after(MORNING, -3600),
      windowTo: after(MORNING, 4 * 86_400),
      currentUntil: live ? after(MORNING, 12 * 3600) : null,
      ...row,
    },
    { content: fullContent(content), reason: 'for a test' },
  )
  return { id, number }
}
