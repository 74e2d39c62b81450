/**
 * From the outbox to the mail server, as rows see it: a batch is taken in a short transaction that folds together what
 * belongs together and hands out a lease; it is sent outside any transaction; what the mail server said is written
 * down. A worker that dies loses its lease and another sends the same rows again, under the same Message-ID.
 *
 * Times here are the machine's, but for what mails say.
 */
import { randomBytes, randomUUID } from 'node:crypto'
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  foldMails,
  insertAttempts,
  insertMail,
  leaseMails,
  listFolded,
  listGone,
  lockAbandonedMails,
  lockClaims,
  lockCompany,
  lockDueMails,
  lockWaitingSummary,
  type MailRow,
  markFailed,
  markSent,
  releaseMails,
  renewLease,
  updateMail,
} from '../db/queries/mail.server.ts'
import type { Site } from '../db/queries/site.server.ts'
import { tx } from '../db/transaction.server.ts'
import { composeGroup, composeSummary, mostUrgent } from '../domain/mail/several.ts'
import {
  FLOOD_MAILS,
  FLOOD_WINDOW_MS,
  floodAnswer,
  GROUP_WAIT_MS,
  MOST_ATTEMPTS,
  mayBeFolded,
  pauseAfterFailure,
} from '../domain/mail/timing.ts'
import { machineNow } from '../machine-time.server.ts'
import { type MailSettings, mailSettings, messageIdOf } from './mail-settings.server.ts'
import { getSite } from './site.server.ts'

/** How long a worker may stay silent before its mails are given to another. */
export const MAIL_LEASE_MS = 60_000
/** At most so many are taken at once. */
const BATCH = 100

/** Mails in the hands of one worker, under one lease. */
export interface ClaimedMails {
  leaseOwner: string
  site: Site
  settings: MailSettings
  mails: MailRow[]
}

/** Takes due mails and those of silent workers; null when there is nothing to send. */
export async function claimMails(
  db: Db,
  options: { machine?: Date; most?: number } = {},
): Promise<ClaimedMails | null> {
  const machine = options.machine ?? machineNow()
  const most = options.most ?? BATCH
  return tx(db, async (inside) => {
    // One worker at a time decides what belongs together and what is too much for a person.
    await lockClaims(inside)
    const abandoned = await takeAbandoned(inside, machine, most)
    const due = await lockDueMails(inside, machine, most - abandoned.length)
    // Behind a long queue the highest would wait: they go first.
    if (due.length > 0 && abandoned.length + due.length >= most) {
      const known = new Set(due.map(({ id }) => id))
      const highest = await lockDueMails(inside, machine, most, true)
      due.unshift(...highest.filter(({ id }) => !known.has(id)))
    }
    if (abandoned.length + due.length === 0) return null
    const site = await getSite(inside)
    const settings = mailSettings(site)
    const going = [...abandoned, ...(await sortOut(inside, due, { machine, site, settings }))]
    if (going.length === 0) return null
    const leaseOwner = randomUUID()
    await leaseMails(
      inside,
      going.map(({ id }) => id),
      { leaseOwner, leaseUntil: new Date(machine.getTime() + MAIL_LEASE_MS), machine },
    )
    const mails = going.map((mail) => ({ ...mail, attempts: mail.attempts + 1 }))
    return { leaseOwner, site, settings, mails }
  })
}

/** One that went silent on its last try is closed as failed: it may be what kills workers. */
async function takeAbandoned(inside: DbOrTx, machine: Date, most: number): Promise<MailRow[]> {
  const found = await lockAbandonedMails(inside, machine, most)
  for (const { id, attempts } of found.filter((mail) => mail.attempts >= MOST_ATTEMPTS)) {
    const lastAnswer = `The worker that sent it went silent at try ${attempts} of ${MOST_ATTEMPTS}.`
    await updateMail(inside, id, { state: 'failed', lastAnswer })
  }
  return found.filter(({ attempts }) => attempts < MOST_ATTEMPTS)
}

interface Round {
  machine: Date
  site: Site
  settings: MailSettings
}

/** Folds groups and floods; returns what goes now. */
async function sortOut(inside: DbOrTx, due: MailRow[], round: Round): Promise<MailRow[]> {
  const going: MailRow[] = []
  const folded = new Set<number>()
  const gone = await goneByPerson(inside, due, round.machine)
  const waiting = await companies(inside, due, round.machine)
  for (const mail of due) {
    if (folded.has(mail.id)) continue
    // What has been tried may have been read: it goes again as it was.
    if (mail.personId === null || mail.attempts > 0) {
      going.push(mail)
      continue
    }
    if (mail.kind === 'summary') {
      going.push(await finishSummary(inside, mail, round))
      continue
    }
    const all = mayLead(mail) ? (waiting.get(groupOf(mail)) ?? []) : []
    const company = all.filter(({ id }) => id !== mail.id && !folded.has(id))
    for (const { id } of company) folded.add(id)
    if (!mayBeFolded(mail.kind, mail.priority)) {
      going.push(mail)
      continue
    }
    const past = gone.get(mail.personId) ?? { mails: [], summary: null }
    gone.set(mail.personId, past)
    const answer = floodAnswer(past.mails, past.summary, round.machine)
    if (answer.kind === 'goes') {
      past.mails.push(round.machine)
      going.push(await foldCompany(inside, mail, company))
    } else {
      folded.add(mail.id)
      await foldIntoSummary(inside, mail, company, answer.summaryAt, round)
    }
  }
  return going
}

interface Past {
  mails: Date[]
  summary: Date | null
}

async function goneByPerson(inside: DbOrTx, due: MailRow[], machine: Date): Promise<Map<number, Past>> {
  const ids = new Set(
    due.flatMap((mail) => (mayBeFolded(mail.kind, mail.priority) ? (mail.personId ?? []) : [])),
  )
  const past = new Map<number, Past>()
  if (ids.size === 0) return past
  const rows = await listGone(inside, [...ids], new Date(machine.getTime() - FLOOD_WINDOW_MS))
  for (const { personId, kind, at } of rows) {
    if (personId === null) continue
    const entry = past.get(personId) ?? { mails: [], summary: null }
    past.set(personId, entry)
    if (kind !== 'summary') entry.mails.push(at)
    else if (entry.summary === null || at > entry.summary) entry.summary = at
  }
  return past
}

/** What waits together, by person and group; asked for once for all that are due. */
async function companies(inside: DbOrTx, due: MailRow[], machine: Date): Promise<Map<string, MailRow[]>> {
  const leads = due.filter(mayLead)
  const personIds = [...new Set(leads.flatMap(({ personId }) => personId ?? []))]
  const groupKeys = [...new Set(leads.map(({ groupKey }) => groupKey))]
  const until = new Date(machine.getTime() + GROUP_WAIT_MS)
  const found = await lockCompany(inside, personIds, groupKeys, until)
  const groups = new Map<string, MailRow[]>()
  for (const mail of found) groups.set(groupOf(mail), [...(groups.get(groupOf(mail)) ?? []), mail])
  return groups
}

function mayLead({ groupKey, personId, priority, attempts }: MailRow): boolean {
  return groupKey !== '' && personId !== null && priority !== 'highest' && attempts === 0
}

function groupOf({ personId, groupKey }: MailRow): string {
  return `${personId} ${groupKey}`
}

/** The first of a group carries the others. */
async function foldCompany(inside: DbOrTx, lead: MailRow, company: MailRow[]): Promise<MailRow> {
  if (company.length === 0) return lead
  const all = [lead, ...company].sort((a, b) => a.id - b.id)
  const mail = composeGroup(all)
  const priority = mostUrgent(all.map((one) => one.priority))
  const changed = { ...pick(mail), priority }
  await updateMail(inside, lead.id, changed)
  await foldMails(
    inside,
    company.map(({ id }) => id),
    lead.id,
  )
  return { ...lead, ...changed }
}

function pick({ subject, text, html }: { subject: string; text: string; html: string }) {
  return { subject, text, html }
}

async function foldIntoSummary(
  inside: DbOrTx,
  mail: MailRow,
  company: MailRow[],
  summaryAt: Date,
  round: Round,
): Promise<void> {
  const personId = mail.personId
  if (personId === null) return
  const waiting = await lockWaitingSummary(inside, personId)
  const summary = waiting ?? (await newSummary(inside, mail, summaryAt, round))
  await foldMails(
    inside,
    [mail, ...company].map(({ id }) => id),
    summary.id,
  )
  await finishSummary(inside, summary, round)
}

async function newSummary(
  inside: DbOrTx,
  mail: MailRow,
  sendAt: Date,
  { settings }: Round,
): Promise<MailRow> {
  const row = {
    messageId: messageIdOf(randomBytes(16).toString('hex'), settings.domain),
    kind: 'summary' as const,
    priority: mail.priority,
    state: 'waiting' as const,
    personId: mail.personId,
    address: mail.address,
    alertId: null,
    threadId: '',
    groupKey: '',
    subject: mail.subject,
    text: '',
    html: '',
    headers: {},
    createdAt: mail.createdAt,
    sendAt,
    attempts: 0,
    leaseOwner: null,
    leaseUntil: null,
    sentAt: null,
    lastAnswer: '',
    foldedInto: null,
  }
  return { ...row, id: await insertMail(inside, row) }
}

/** Writes a summary from all that is folded into it now. */
async function finishSummary(inside: DbOrTx, summary: MailRow, round: Round): Promise<MailRow> {
  const mails = await listFolded(inside, summary.id)
  const { publicUrl } = round.settings
  const changed = {
    ...composeSummary({
      siteCode: round.site.code,
      mails,
      sentBefore: FLOOD_MAILS,
      minutes: FLOOD_WINDOW_MS / 60_000,
      link: publicUrl === '' ? null : `${publicUrl}/alerts`,
    }),
    priority: mostUrgent(mails.map(({ priority }) => priority)),
  }
  await updateMail(inside, summary.id, changed)
  return { ...summary, ...changed }
}

/** Says that a batch is still being sent; false when none of it is this worker's any more. */
export async function renewMails(db: Db, leaseOwner: string, machine: Date = machineNow()): Promise<boolean> {
  return (await renewLease(db, leaseOwner, new Date(machine.getTime() + MAIL_LEASE_MS))) > 0
}

/** What the mail server said to one try. */
export interface Tried {
  mail: MailRow
  at: Date
  tookMs: number
  answer: string
}

/** Notes that mails were accepted. */
export async function noteSent(
  db: Db,
  owner: string,
  leaseOwner: string,
  tried: readonly Tried[],
  machine: Date = machineNow(),
): Promise<void> {
  if (tried.length === 0) return
  await tx(db, async (inside) => {
    await insertAttempts(
      inside,
      tried.map((one) => attemptRow(one, owner, true)),
    )
    const sent = tried.map(({ mail, answer }) => ({ id: mail.id, answer: answer.slice(0, 500) }))
    await markSent(inside, leaseOwner, sent, machine)
  })
}

function attemptRow({ mail, at, tookMs, answer }: Tried, owner: string, accepted: boolean) {
  return {
    outboxId: mail.id,
    at,
    owner,
    accepted,
    answer: answer.slice(0, 500),
    tookMs: Math.round(tookMs),
  }
}

/** From this many failed tries on somebody is told. */
const TRIES_UNTIL_SAID = 3

/** What is done inside the same transaction when a mail cannot be delivered. */
export type Undelivered = (
  inside: DbOrTx,
  fact: { mail: MailRow; attempts: number; final: boolean; answer: string },
) => Promise<void>

/**
 * Notes a try that failed: again after a growing pause, given up after the last one or when `final`.
 *
 * @returns `lost` when the mail has gone to another worker meanwhile
 */
export async function noteFailed(
  db: Db,
  owner: string,
  leaseOwner: string,
  tried: Tried,
  options: { final: boolean; undelivered: Undelivered; machine?: Date; random?: number },
): Promise<'again' | 'failed' | 'lost'> {
  const machine = options.machine ?? machineNow()
  const { attempts } = tried.mail
  const final = options.final || attempts >= MOST_ATTEMPTS
  return tx(db, async (inside) => {
    await insertAttempts(inside, [attemptRow(tried, owner, false)])
    const pause = pauseAfterFailure(attempts, options.random ?? Math.random())
    const held = await markFailed(inside, leaseOwner, tried.mail.id, {
      state: final ? 'failed' : 'waiting',
      lastAnswer: tried.answer.slice(0, 500),
      sendAt: final ? tried.mail.sendAt : new Date(machine.getTime() + pause),
    })
    if (!held) return 'lost'
    if (final || attempts === TRIES_UNTIL_SAID)
      await options.undelivered(inside, { mail: tried.mail, attempts, final, answer: tried.answer })
    return final ? 'failed' : 'again'
  })
}

/** Gives back what was taken and not begun. */
export async function giveBack(
  db: Db,
  leaseOwner: string,
  mails: readonly MailRow[],
  machine: Date = machineNow(),
): Promise<void> {
  const ids = mails.map(({ id }) => id)
  await releaseMails(db, leaseOwner, ids, machine)
}
