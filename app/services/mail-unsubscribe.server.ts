/** The way out that a mail offers: of digests and of mails of low priority, which duty does not ask for. */
import type { Db } from '../db/client.server.ts'
import { findMailByMessageId, type MailRow, saveUnsubscribed } from '../db/queries/mail.server.ts'
import { DomainError } from '../domain/errors.ts'
import { mailSettings, messageIdOf } from './mail-settings.server.ts'
import { getSite } from './site.server.ts'

export type Unsubscribing = 'digest' | 'low'

/**
 * What the holder of a mail may unsubscribe from. The address is random and stands in that one mail.
 *
 * @throws DomainError not-found when no mail that can be unsubscribed from has this address
 */
export async function readUnsubscribing(db: Db, token: string): Promise<Unsubscribing> {
  return (await find(db, token)).what
}

async function find(db: Db, token: string): Promise<{ what: Unsubscribing; personId: number }> {
  const { domain } = mailSettings(await getSite(db))
  const mail = /^[0-9a-f]{32}$/.test(token) ? await findMailByMessageId(db, messageIdOf(token, domain)) : null
  const what = mail === null ? null : unsubscribingOf(mail)
  if (mail === null || what === null || mail.personId === null)
    throw new DomainError(
      'not-found',
      'Nothing can be unsubscribed from at this address. Preferences on your account are where mail is set.',
    )
  return { what, personId: mail.personId }
}

function unsubscribingOf({ kind, priority, headers }: MailRow): Unsubscribing | null {
  if (!('List-Unsubscribe' in headers)) return null
  if (kind === 'digest') return 'digest'
  return priority === 'low' ? 'low' : null
}

/** Sends no more of these: low ones go into the daily digest instead, and the digest is no longer mailed. */
export async function unsubscribe(db: Db, now: Date, token: string): Promise<Unsubscribing> {
  const { what, personId } = await find(db, token)
  await saveUnsubscribed(db, personId, what === 'digest' ? { digest: false } : { lowToDigest: true }, now)
  return what
}
