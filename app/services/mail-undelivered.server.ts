/** Mail that cannot be delivered is itself an alert, to the administrators: one for each address, until it has ended. */
import type { DbOrTx } from '../db/client.server.ts'
import { findOpenUndelivered, insertUndelivered } from '../db/queries/mail.server.ts'
import { listGrantRows, listPeople } from '../db/queries/people.server.ts'
import { headerSafe } from '../domain/mail/text.ts'
import { rolesAt } from '../domain/roles.ts'
import { mailAboutAlert } from './mail-outbox.server.ts'
import type { Undelivered } from './mail-sending.server.ts'

const WORDS = {
  why: 'Whoever should have been told has not been, and others rely on it.',
  whatToDo:
    'Tell the person by telephone. Look at the address on their page and at the answers of the mail server under Sent mail; mend what is wrong and send again.',
  howLong: 'Before the next alert goes to the same address.',
  who: 'An administrator.',
}

/**
 * What to do when a mail cannot be delivered, at a time by the product's clock.
 *
 * @param now called inside the transaction
 */
export function sayUndelivered(now: () => Promise<Date>): Undelivered {
  return async (inside, { mail, attempts, final, answer }) => {
    const at = await now()
    if ((await findOpenUndelivered(inside, mail.address)) !== null) return
    const tries = attempts === 1 ? '1 try' : `${attempts} tries`
    const alertId = await insertUndelivered(inside, {
      address: mail.address,
      outboxId: mail.id,
      title: headerSafe(`mail to ${mail.address} not delivered after ${tries}`, 200),
      detail: { address: mail.address, outboxId: mail.id, attempts, final, answer },
      text: headerSafe(answer, 1000),
      at,
    })
    const personIds = await administrators(inside, at, mail.address)
    if (personIds.length === 0) return
    await mailAboutAlert(inside, at, {
      alertId,
      kind: 'alert',
      personIds,
      sentences: WORDS,
      findings: [`The mail server said: ${headerSafe(answer, 300)}`, `It was to say: ${mail.subject}`],
    })
  }
}

/** Not by the address that takes no mail: the page of alerts shows it regardless. */
async function administrators(inside: DbOrTx, at: Date, but: string): Promise<number[]> {
  const [people, grants] = await Promise.all([listPeople(inside), listGrantRows(inside)])
  return people
    .filter(({ email, signsIn, endsAt }) => signsIn && (endsAt === null || endsAt > at) && email !== but)
    .filter(({ id }) =>
      rolesAt(
        grants.filter(({ personId }) => personId === id),
        at,
      ).includes('administrator'),
    )
    .map(({ id }) => id)
}
