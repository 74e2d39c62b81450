/**
 * Mail to be sent is a row written in the transaction of what it tells: an event that is undone leaves no mail, and one
 * that stands has its mail. The worker sends it, see mail-sending.server.ts.
 */
import { randomBytes } from 'node:crypto'
import type { DbOrTx } from '../db/client.server.ts'
import {
  findAlertForMail,
  findGroupTime,
  findQuietHours,
  insertMail,
  listAddressees,
  listBounces,
  listMailsOfAlert,
} from '../db/queries/mail.server.ts'
import { AlertRuleContentSchema } from '../domain/alert-rules.ts'
import type { AlertPriority, MailKind } from '../domain/alert-words.ts'
import { DomainError } from '../domain/errors.ts'
import { BOUNCE_WINDOW_MS, isUndeliverable, undeliverableWords } from '../domain/mail/bounces.ts'
import { type ComposedMail, composeAlertMail } from '../domain/mail/compose.ts'
import { headerSafe, isHeaderName, isMailAddress } from '../domain/mail/text.ts'
import { GROUP_WAIT_MS, quietUntil, waitsForCompany } from '../domain/mail/timing.ts'
import { machineNow } from '../machine-time.server.ts'
import { mailSettings, messageIdOf, tokenOf } from './mail-settings.server.ts'
import { getSite } from './site.server.ts'

export interface NewMail extends ComposedMail {
  kind: MailKind
  priority: AlertPriority
  to: { personId: number | null; address: string }
  alertId?: number | null
  /** Tag of the segment: alerts of one that come together become one mail. */
  segmentTag?: string | null
  /** Further headers; none that the sender sets itself. */
  headers?: Record<string, string>
}

export interface EnqueuedMail {
  outboxId: number
  /** `failed`: it will not go, see `why`; whoever calls people goes on to the next at once. */
  state: 'waiting' | 'failed'
  why: string
  /** Whether it was there already: an occurrence is told to a person once. */
  again: boolean
}

/**
 * Writes a mail into the outbox, inside the transaction of what it tells. An address that is none, or from which mails
 * keep coming back, gets a row that says so and is not tried.
 *
 * @param now the product's time
 */
export async function enqueueMail(inside: DbOrTx, now: Date, mail: NewMail): Promise<EnqueuedMail> {
  const site = await getSite(inside)
  const settings = mailSettings(site)
  const { alertId = null, segmentTag = null, to } = mail
  const earlier = alertId === null ? [] : await listMailsOfAlert(inside, alertId)
  const told = earlier.find(({ kind, personId }) => kind === mail.kind && personId === to.personId)
  if (told !== undefined && (mail.kind === 'alert' || mail.kind === 'clear'))
    return {
      outboxId: told.id,
      state: told.state === 'failed' ? 'failed' : 'waiting',
      why: told.lastAnswer,
      again: true,
    }
  const machine = machineNow()
  const groupKey =
    to.personId !== null && segmentTag !== null && waitsForCompany(mail.kind, mail.priority)
      ? `segment:${segmentTag}`
      : ''
  const why = await whyNot(inside, now, to.address)
  const messageId = messageIdOf(randomBytes(16).toString('hex'), settings.domain)
  const outboxId = await insertMail(inside, {
    messageId,
    kind: mail.kind,
    priority: mail.priority,
    state: why === '' ? 'waiting' : 'failed',
    personId: to.personId,
    address: headerSafe(to.address, 254),
    alertId,
    threadId: threadOf(earlier),
    groupKey,
    subject: headerSafe(mail.subject),
    text: mail.text,
    html: mail.html,
    headers: { ...unsubscribing(mail, messageId, settings), ...safeHeaders(mail.headers ?? {}) },
    createdAt: now,
    sendAt: await sendTime(inside, now, machine, mail, groupKey, site.timeZone),
    lastAnswer: why,
  })
  return { outboxId, state: why === '' ? 'waiting' : 'failed', why, again: false }
}

async function whyNot(inside: DbOrTx, now: Date, address: string): Promise<string> {
  if (!isMailAddress(address))
    return `Not sent: “${headerSafe(address, 100)}” is not a mail address. Expected one like name@example.org; People is where it is set.`
  const bounces = await listBounces(inside, address, new Date(now.getTime() - BOUNCE_WINDOW_MS))
  return isUndeliverable(bounces, now) ? undeliverableWords(address, bounces, now) : ''
}

/** The first mail of the occurrence that went or will go as such; one told within another is found there. */
function threadOf(earlier: Awaited<ReturnType<typeof listMailsOfAlert>>): string {
  return (earlier.find(({ state }) => state !== 'folded') ?? earlier[0])?.messageId ?? ''
}

async function sendTime(
  inside: DbOrTx,
  now: Date,
  machine: Date,
  mail: NewMail,
  groupKey: string,
  zone: string,
): Promise<Date> {
  const { personId } = mail.to
  const quiet = personId === null ? null : await findQuietHours(inside, personId)
  const quietEnd = quiet === null ? null : quietUntil(quiet, mail.priority, now, zone)
  if (quietEnd !== null) return new Date(machine.getTime() + quietEnd.getTime() - now.getTime())
  if (groupKey === '' || personId === null) return machine
  const alone = new Date(machine.getTime() + GROUP_WAIT_MS)
  const first = await findGroupTime(inside, personId, groupKey)
  return first !== null && first < alone ? first : alone
}

function safeHeaders(headers: Record<string, string>): Record<string, string> {
  return Object.fromEntries(
    Object.entries(headers)
      .filter(([name]) => isHeaderName(name))
      .map(([name, value]) => [name, headerSafe(value, 900)]),
  )
}

/**
 * What duty allows to be switched off can be, from the mail program itself: digests and low priority (RFC 2369). One
 * click is offered where the product is reached over TLS, as RFC 8058 asks.
 */
export function unsubscribing(
  mail: Pick<NewMail, 'kind' | 'priority' | 'to'>,
  messageId: string,
  settings: ReturnType<typeof mailSettings>,
): Record<string, string> {
  const may = mail.kind === 'digest' || (mail.priority === 'low' && mail.kind === 'alert')
  if (!may || mail.to.personId === null) return {}
  if (settings.publicUrl === '')
    return { 'List-Unsubscribe': `<mailto:${settings.replyTo}?subject=No%20more%20of%20these>` }
  const address = `<${settings.publicUrl}/unsubscribe/${tokenOf(messageId)}>`
  if (!settings.secure) return { 'List-Unsubscribe': address }
  return { 'List-Unsubscribe': address, 'List-Unsubscribe-Post': 'List-Unsubscribe=One-Click' }
}

export interface AlertMail {
  alertId: number
  kind: 'alert' | 'escalation' | 'clear'
  /** Who is told; each once for an occurrence, and once for each escalation. */
  personIds: readonly number[]
  /** Words of the rule, where the alert has no rule or its own are better. */
  sentences?: { why?: string; whatToDo?: string; howLong?: string; who?: string }
  /** Further findings, a sentence each. */
  findings?: readonly string[]
  /** What happens if nobody takes it, for example `calls on-call 1 at 02:39`. */
  next?: string | null
  /** Why somebody gets it, by person. */
  because?: ReadonlyMap<number, string>
}

/**
 * Writes the mails about an alert to the people named, inside the transaction of what happened to it.
 *
 * @returns what became of each, by person: also of those who have no address
 * @throws DomainError not-found when there is no such alert
 */
export async function mailAboutAlert(
  inside: DbOrTx,
  now: Date,
  told: AlertMail,
): Promise<Map<number, EnqueuedMail>> {
  const found = await findAlertForMail(inside, told.alertId)
  if (found === null) throw new DomainError('not-found', `There is no alert ${told.alertId} to mail about.`)
  const site = await getSite(inside)
  const { publicUrl } = mailSettings(site)
  const { alert, segmentTag, positionTag, sourceCode, permitNumber, ownerName } = found
  const parsed = AlertRuleContentSchema.safeParse(found.ruleContent)
  const rule = parsed.success ? parsed.data : { why: '', whatToDo: '', howLong: '', who: '' }
  const results = new Map<number, EnqueuedMail>()
  for (const { personId, address } of await listAddressees(inside, [...told.personIds])) {
    const mail = composeAlertMail({
      site,
      kind: told.kind,
      priority: alert.priority,
      place: segmentTag ?? sourceCode ?? permitNumber ?? positionTag ?? '',
      title: alert.title,
      value: alert.value,
      limit: alert.limitValue,
      unit: alert.unit,
      startedAt: alert.startedAt,
      noticedAt: alert.noticedAt,
      clearedAt: told.kind === 'clear' ? alert.clearedAt : null,
      findings: told.findings ?? [],
      why: told.sentences?.why ?? rule.why,
      whatToDo: told.sentences?.whatToDo ?? rule.whatToDo,
      howLong: told.sentences?.howLong ?? rule.howLong,
      who: told.sentences?.who ?? rule.who,
      ownerName,
      next: told.next ?? null,
      because: told.because?.get(personId) ?? null,
      link: publicUrl === '' ? null : `${publicUrl}/a/${alert.id}`,
    })
    results.set(
      personId,
      await enqueueMail(inside, now, {
        ...mail,
        kind: told.kind,
        priority: alert.priority,
        to: { personId, address: address ?? '' },
        alertId: alert.id,
        segmentTag,
      }),
    )
  }
  return results
}
