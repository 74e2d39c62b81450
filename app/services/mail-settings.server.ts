/** How mail of this site is addressed, from the settings and the site's own name. */

import { headerSafe, isMailAddress } from '../domain/mail/text.ts'
import { env } from '../env.server.ts'

export interface MailSettings {
  from: { name: string; address: string }
  replyTo: string
  domain: string
  /** Address people use, without a slash at its end; empty when nobody has set one. */
  publicUrl: string
  /** Whether that address is one over TLS, which one-click unsubscribing asks for. */
  secure: boolean
}

type Given = Pick<ReturnType<typeof env>, 'MAIL_FROM' | 'MAIL_REPLY_TO' | 'MAIL_DOMAIN' | 'PUBLIC_URL'>

/**
 * @throws Error when MAIL_FROM or MAIL_REPLY_TO holds no address
 */
export function mailSettings(site: { code: string; name: string }, given: Given = env()): MailSettings {
  const from = readSender(given.MAIL_FROM, 'MAIL_FROM')
  const domain =
    given.MAIL_DOMAIN ||
    from?.address.slice(from.address.lastIndexOf('@') + 1) ||
    `${hostWord(site.code)}.example`
  const sender = from ?? { name: '', address: `alerts@${domain}` }
  const publicUrl = given.PUBLIC_URL.replace(/\/+$/, '')
  return {
    from: { ...sender, name: headerSafe(sender.name || `${site.name} vacuum log`, 120) },
    replyTo: readSender(given.MAIL_REPLY_TO, 'MAIL_REPLY_TO')?.address ?? sender.address,
    domain: domain.toLowerCase(),
    publicUrl,
    secure: publicUrl.startsWith('https://'),
  }
}

function readSender(text: string, setting: string): { name: string; address: string } | null {
  if (text.trim() === '') return null
  const match = /^\s*(?:"?([^"<>]*?)"?\s*<([^<>]+)>|([^<>\s]+))\s*$/.exec(text)
  const address = (match?.[2] ?? match?.[3] ?? '').trim()
  if (!isMailAddress(address))
    throw new Error(
      `${setting} is “${headerSafe(text, 100)}”; expected an address like alerts@example.org or Name <alerts@example.org>.`,
    )
  return { name: match?.[1] ?? '', address }
}

/** Names of `.example` belong to nobody, so that a site without settings cannot speak for somebody else. */
function hostWord(code: string): string {
  return code.toLowerCase().replace(/[^a-z0-9-]/g, '') || 'site'
}

/** `<random@own-domain>`. The random part also names the mail in its bounce address and in its way to unsubscribe. */
export function messageIdOf(token: string, domain: string): string {
  return `<${token}@${domain}>`
}

/** What stands before the @ of one of our message ids. */
export function tokenOf(messageId: string): string {
  return messageId.slice(1, messageId.lastIndexOf('@'))
}

/** Where a mail comes back to when it cannot be delivered: of its own for each, so that the bounce names the mail. */
export function bounceAddress(messageId: string, domain: string): string {
  return `bounces+${tokenOf(messageId)}@${domain}`
}

/** The mail that a bounce address names, or null. */
export function tokenOfBounceAddress(address: string): string | null {
  return /^bounces\+([0-9a-f]{32})@/i.exec(address.trim())?.[1]?.toLowerCase() ?? null
}
