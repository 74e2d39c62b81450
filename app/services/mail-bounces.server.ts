/**
 * What comes back: delivery-status notifications (RFC 3464) handed in by the mail server. They are read and written
 * down, and never answered: an answer to a notice that has no sender would go round in circles.
 */
import { type Attachment, simpleParser } from 'mailparser'
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  escalateAlertsTold,
  findMailByMessageId,
  insertBounce,
  listBounces,
  type MailRow,
} from '../db/queries/mail.server.ts'
import { tx } from '../db/transaction.server.ts'
import { DomainError } from '../domain/errors.ts'
import { BOUNCE_WINDOW_MS, isUndeliverable } from '../domain/mail/bounces.ts'
import { headerSafe } from '../domain/mail/text.ts'
import type { Undelivered } from './mail-sending.server.ts'
import { mailSettings, messageIdOf, tokenOfBounceAddress } from './mail-settings.server.ts'
import { getSite } from './site.server.ts'

/** What a notification says of one recipient. */
export interface ReadBounce {
  /** Whom it was for, as the mail server that gave up knows them; empty when it does not say. */
  recipient: string
  action: string
  status: string
  diagnostic: string
}

export interface ReadNotification {
  /** The mail of ours that it is about, by its bounce address or by the Message-ID that it quotes. */
  token: string | null
  bounces: ReadBounce[]
}

/**
 * Reads a delivery-status notification.
 *
 * @throws DomainError bad-input when the message is none
 */
export async function readNotification(bytes: Uint8Array): Promise<ReadNotification> {
  const message = await simpleParser(Buffer.from(bytes), { keepDeliveryStatus: true })
  const report = message.attachments.find(({ contentType }) => contentType === 'message/delivery-status')
  if (report === undefined) {
    const type = message.headers.get('content-type')
    const found = typeof type === 'object' && 'value' in type ? String(type.value) : 'no content type'
    throw new DomainError(
      'bad-input',
      `Found a message of the type “${headerSafe(found, 80)}” without a part message/delivery-status; expected a delivery-status notification (RFC 3464), whole and as it came.`,
    )
  }
  const groups = await fieldGroups(report)
  const bounces = groups
    // The first group is about the message as a whole.
    .filter((fields) => fields.has('final-recipient') || fields.has('action'))
    .map((fields) => ({
      recipient: typed(fields.get('original-recipient') ?? fields.get('final-recipient')),
      action: (fields.get('action') ?? '').toLowerCase().slice(0, 20),
      status: (/\d\.\d{1,3}\.\d{1,3}/.exec(fields.get('status') ?? '')?.[0] ?? '').slice(0, 20),
      diagnostic: headerSafe(typed(fields.get('diagnostic-code')), 500),
    }))
  const recipients = [message.to ?? []].flat().flatMap(({ value }) => value)
  const named = recipients
    .map(({ address }) => tokenOfBounceAddress(address ?? ''))
    .find((one) => one !== null)
  return { token: named ?? quotedToken(message.attachments), bounces }
}

/** Groups of fields with an empty line between them, each read as the head of a mail. */
async function fieldGroups(report: Attachment): Promise<Map<string, string>[]> {
  const groups = report.content
    .toString('utf8')
    .split(/\r?\n[ \t]*\r?\n/)
    .filter((group) => group.trim() !== '')
  return Promise.all(
    groups.map(async (group) => {
      const { headerLines } = await simpleParser(`${group.trim()}\r\n\r\n`)
      return new Map(
        headerLines.map(({ key, line }) => [
          key,
          line
            .slice(line.indexOf(':') + 1)
            .replace(/\s+/g, ' ')
            .trim(),
        ]),
      )
    }),
  )
}

/** `rfc822;name@example.org` and `smtp;550 No such user` without their type. */
function typed(field: string | undefined): string {
  return (field ?? '').replace(/^[a-z0-9-]+\s*;\s*/i, '').trim()
}

/** The Message-ID of the mail that is sent back with the notice, whole or its head only. */
function quotedToken(attachments: readonly Attachment[]): string | null {
  for (const { contentType, content } of attachments) {
    if (contentType !== 'message/rfc822' && contentType !== 'text/rfc822-headers') continue
    const token = /^message-id:\s*<([0-9a-f]{32})@/im.exec(content.toString('utf8'))?.[1]
    if (token !== undefined) return token.toLowerCase()
  }
  return null
}

export interface TakenBounces {
  /** How many were written down. */
  noted: number
  /** Addresses that are given up from now on. */
  givenUp: string[]
}

/**
 * Writes down what a notification says. The third mail that comes back from an address within a week makes it one that
 * is not tried any more: the ladder goes on at once for what that person was told, and somebody is told of it.
 *
 * @param now the product's time
 * @throws DomainError bad-input (no notification), not-found (about no mail of ours)
 */
export async function takeInBounce(
  db: Db,
  now: Date,
  bytes: Uint8Array,
  undelivered: Undelivered,
): Promise<TakenBounces> {
  const { token, bounces } = await readNotification(bytes)
  const { domain } = mailSettings(await getSite(db))
  return tx(db, async (inside) => {
    const mail = token === null ? null : await findMailByMessageId(inside, messageIdOf(token, domain))
    if (mail === null)
      throw new DomainError(
        'not-found',
        'The notification names no mail of ours: neither is it addressed to a bounce address that one has, nor does it quote one. Nothing was written down.',
      )
    const givenUp: string[] = []
    // A mail of ours has one recipient: whatever name the far server knows them by, it is that one.
    const [worst] = bounces.toSorted((a, b) => Number(b.action === 'failed') - Number(a.action === 'failed'))
    if (worst === undefined) return { noted: 0, givenUp }
    if (await noteBounce(inside, now, mail, worst)) {
      givenUp.push(mail.address)
      if (mail.personId !== null) await escalateAlertsTold(inside, mail.personId, now)
      const answer = `${worst.status} ${worst.diagnostic}`.trim()
      await undelivered(inside, { mail, attempts: mail.attempts, final: true, answer })
    }
    return { noted: 1, givenUp }
  })
}

/** @returns whether the address has just become one that is given up */
async function noteBounce(inside: DbOrTx, now: Date, mail: MailRow, bounce: ReadBounce): Promise<boolean> {
  const since = new Date(now.getTime() - BOUNCE_WINDOW_MS)
  const before = await listBounces(inside, mail.address, since)
  // A mail server that repeats its notice has not failed twice.
  if (before.some(({ outboxId, action }) => outboxId === mail.id && action === bounce.action)) return false
  await insertBounce(inside, {
    outboxId: mail.id,
    personId: mail.personId,
    address: mail.address,
    at: now,
    action: bounce.action,
    status: bounce.status,
    diagnostic: bounce.diagnostic,
  })
  return (
    !isUndeliverable(before, now) && isUndeliverable([...before, { at: now, action: bounce.action }], now)
  )
}
