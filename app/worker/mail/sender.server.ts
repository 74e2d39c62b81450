/** Sends what is in the outbox, as long as the worker lives: several at once, several workers beside each other. */
import type { Db } from '../../db/client.server.ts'
import { log } from '../../log.server.ts'
import { elapsedMs, machineNow } from '../../machine-time.server.ts'
import {
  type ClaimedMails,
  claimMails,
  giveBack,
  MAIL_LEASE_MS,
  noteFailed,
  noteSent,
  renewMails,
  type Tried,
  type Undelivered,
} from '../../services/mail-sending.server.ts'
import { toMessage } from './message.ts'
import { CONNECTIONS, type MailTransport, readRefusal } from './transport.ts'

const IDLE_MS = 500
/** After so many in a row without an answer the rest is given back: the server is away. */
const SILENT_UNTIL_AWAY = 5
const AWAY_MS = 5_000
/** Accepted mails are noted together: so many, or after so long. A worker killed before repeats no more than these. */
const NOTE_MAILS = 25
const NOTE_MS = 100
/** One more than there are connections for each, so that none waits for the next mail to be written. */
const HANDS = CONNECTIONS * 2

export interface MailSender {
  /** Sends one batch; returns ms until it is worth looking again. */
  step(): Promise<number>
}

export interface SenderOptions {
  db: Db
  transport: MailTransport
  /** Name of this worker in the list of tries. */
  owner: string
  signal: AbortSignal
  undelivered: Undelivered
}

/** Makes a sender. With a queue behind it, it takes the next batch while the last is on its way. */
export function makeSender(options: SenderOptions): MailSender {
  const { db, signal } = options
  let ahead: Promise<ClaimedMails | null> | null = null
  return {
    async step() {
      const taken = ahead ?? claimMails(db)
      ahead = null
      const claimed = await taken
      if (claimed === null) return IDLE_MS
      if (!(await renewMails(db, claimed.leaseOwner))) return 0
      const full = claimed.mails.length >= 50
      if (full && !signal.aborted) {
        ahead = claimMails(db)
        // Looked at by the next step; without a listener until then a failure would end the process.
        ahead.catch(() => {})
      }
      const away = await sendBatch(options, claimed)
      if ((away || signal.aborted) && ahead !== null) {
        const unused = await ahead
        ahead = null
        if (unused !== null) await giveBack(db, unused.leaseOwner, unused.mails)
      }
      return away ? AWAY_MS : 0
    },
  }
}

/** @returns whether the mail server is away */
async function sendBatch(options: SenderOptions, claimed: ClaimedMails): Promise<boolean> {
  const { db, owner, signal } = options
  const { leaseOwner } = claimed
  const queue = [...claimed.mails]
  let accepted: Tried[] = []
  let silent = 0
  let lost = false
  let noting = Promise.resolve()
  const note = () => {
    const some = accepted
    accepted = []
    noting = noting.then(() => noteSent(db, owner, leaseOwner, some))
    return noting
  }
  const away = () => silent >= SILENT_UNTIL_AWAY
  const timer = setInterval(() => {
    if (accepted.length > 0) note().catch(() => {})
  }, NOTE_MS)
  const renewal = setInterval(() => {
    renewMails(db, leaseOwner).then(
      (kept) => {
        lost ||= !kept
      },
      (error: unknown) => log.warn('could not renew the lease of mails', { error }),
    )
  }, MAIL_LEASE_MS / 3)
  const hand = async () => {
    while (!signal.aborted && !away() && !lost) {
      const mail = queue.shift()
      if (mail === undefined) return
      const tried = await tryOne(options, claimed, mail)
      if (tried.refusal === null) {
        silent = 0
        accepted.push(tried)
        if (accepted.length >= NOTE_MAILS) await note()
        continue
      }
      silent = tried.refusal.unreachable ? silent + 1 : 0
      await noteRefusal(options, leaseOwner, tried, tried.refusal.final)
    }
  }
  try {
    const hands = await Promise.allSettled(Array.from({ length: HANDS }, hand))
    await note()
    const failed = hands.find((result) => result.status === 'rejected')
    if (failed !== undefined) throw failed.reason
  } finally {
    clearInterval(timer)
    clearInterval(renewal)
  }
  if (queue.length > 0)
    await giveBack(db, leaseOwner, queue, new Date(machineNow().getTime() + (away() ? AWAY_MS : 0)))
  return away()
}

async function noteRefusal(
  { db, owner, undelivered }: SenderOptions,
  leaseOwner: string,
  tried: Tried,
  final: boolean,
): Promise<void> {
  const outcome = await noteFailed(db, owner, leaseOwner, tried, { final, undelivered })
  const facts = { mail: tried.mail.id, attempt: tried.mail.attempts, answer: tried.answer, outcome }
  if (outcome === 'failed') log.error('a mail was given up', facts)
  else log.warn('a mail was not taken', facts)
}

async function tryOne(
  { transport }: SenderOptions,
  claimed: ClaimedMails,
  mail: ClaimedMails['mails'][number],
): Promise<Tried & { refusal: ReturnType<typeof readRefusal> | null }> {
  const at = machineNow()
  const started = performance.now()
  try {
    const answer = await transport.send(toMessage(mail, claimed))
    return { mail, at, tookMs: elapsedMs(started), answer, refusal: null }
  } catch (error) {
    const refusal = readRefusal(error)
    return { mail, at, tookMs: elapsedMs(started), answer: refusal.answer, refusal }
  }
}
