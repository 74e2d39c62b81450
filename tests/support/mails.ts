/** Mails for tests, and the outbox as they left it. */
import { asc } from 'drizzle-orm'
import type { Db } from '#app/db/client.server.ts'
import { mailOutbox } from '#app/db/schema/index.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { type EnqueuedMail, enqueueMail, type NewMail } from '#app/services/mail-outbox.server.ts'
import { claimMails, noteSent } from '#app/services/mail-sending.server.ts'
import { MORNING } from './clock.ts'

/** Writes a mail that says little, with what a test wants of it. */
export function enqueueTestMail(
  db: Db,
  to: { personId: number | null; address: string },
  changed: Partial<NewMail> = {},
  now = MORNING,
): Promise<EnqueuedMail> {
  return db.transaction((inside) =>
    enqueueMail(inside, now, {
      kind: 'alert',
      priority: 'high',
      subject: '[TST] HIGH SG-T1 spread 24 C (limit 20) since 02:14 +0100',
      text: 'SG-T1  Spread along the tube',
      html: '<p>SG-T1  Spread along the tube</p>',
      to,
      ...changed,
    }),
  )
}

export function outbox(db: Db): Promise<(typeof mailOutbox.$inferSelect)[]> {
  return db.select().from(mailOutbox).orderBy(asc(mailOutbox.id))
}

/** So many seconds from now by the machine. */
export function machineIn(seconds: number): Date {
  return new Date(machineNow().getTime() + seconds * 1000)
}

/** Takes what is due at an instant, and says that the mail server has accepted all of it; the mails. */
export async function acceptAll(db: Db, machine: Date) {
  const sent = []
  for (;;) {
    const claimed = await claimMails(db, { machine })
    if (claimed === null) return sent
    const tried = claimed.mails.map((mail) => ({ mail, at: machine, tookMs: 1, answer: '250 OK' }))
    await noteSent(db, 'test', claimed.leaseOwner, tried, machine)
    sent.push(...claimed.mails)
  }
}
