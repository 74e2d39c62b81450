/** Workers that die while they send, and mail servers that misbehave: no mail is lost, and repeats are known as such. */
import { type ChildProcess, spawn } from 'node:child_process'
import { once } from 'node:events'
import { sql } from 'drizzle-orm'
import { beforeEach, expect, it, onTestFinished } from 'vitest'
import { mailAttempt, mailOutbox } from '#app/db/schema/index.ts'
import { makeSender } from '#app/worker/mail/sender.server.ts'
import { openTransport } from '#app/worker/mail/transport.ts'
import { currentTestDatabaseUrl, freshDatabase } from '#tests/support/db.ts'
import { createSite } from '#tests/support/factories.ts'
import { FAULT_SEEDS, pause, shareOf } from '#tests/support/intake-faults.ts'
import { enqueueTestMail, outbox } from '#tests/support/mails.ts'
import { startTroubledServer, type Trouble, type TroubledServer } from '#tests/support/smtp-trouble.ts'

const db = freshDatabase()
const MAILS = 60
const WITHIN_MS = 120_000
/** Each takes ten seconds: two in every run, all of those asked for in a soak. */
const SEEDS = process.env.FAULT_SEEDS === undefined ? FAULT_SEEDS.slice(0, 2) : FAULT_SEEDS

let smtp: TroubledServer

beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  smtp = await startTroubledServer()
  onTestFinished(() => smtp.stop())
})

async function enqueueMany(): Promise<void> {
  for (let n = 0; n < MAILS; n += 1) {
    const changed = { kind: 'notice' as const, subject: `event ${n}` }
    await enqueueTestMail(db, { personId: null, address: `p${n}@example.test` }, changed)
  }
}

async function startWorker(): Promise<ChildProcess> {
  const child = spawn(process.execPath, ['--import', 'tsx', 'tests/support/send-mail-process.ts'], {
    env: { ...process.env, DATABASE_URL: currentTestDatabaseUrl(), SMTP_URL: smtp.url },
    stdio: ['ignore', 'pipe', 'inherit'],
  })
  onTestFinished(() => {
    child.kill('SIGKILL')
  })
  for await (const piece of child.stdout ?? []) if (String(piece).includes('begun')) break
  return child
}

async function kill(child: ChildProcess): Promise<void> {
  const gone = child.exitCode !== null || child.signalCode !== null ? Promise.resolve() : once(child, 'exit')
  child.kill('SIGKILL')
  await gone
}

/** All pauses and leases over, as if hours had passed. */
async function letTimePass(): Promise<void> {
  await db.update(mailOutbox).set({
    sendAt: sql`LEAST(${mailOutbox.sendAt}, UTC_TIMESTAMP(3) - INTERVAL 1 SECOND)`,
    leaseUntil: sql`LEAST(${mailOutbox.leaseUntil}, UTC_TIMESTAMP(3) - INTERVAL 1 SECOND)`,
  })
}

/** A worker without trouble sends what is left. */
async function drain(): Promise<void> {
  smtp.trouble = 'none'
  smtp.onBegin = () => {}
  smtp.onKept = () => {}
  const transport = openTransport(smtp.url, { silentMs: 2_000 })
  const sender = makeSender({
    db,
    transport,
    owner: 'after',
    signal: new AbortController().signal,
    undelivered: async () => {},
  })
  try {
    for (let round = 0; round < 50; round += 1) {
      await letTimePass()
      await sender.step()
      if ((await outbox(db)).every(({ state }) => state === 'sent')) return
    }
    throw new Error('The queue did not drain.')
  } finally {
    transport.close()
  }
}

/** Every event's mail was accepted at least once; what came twice came under the same Message-ID and is the same. */
async function expectNoneLost(): Promise<void> {
  const rows = await outbox(db)
  expect(rows).toHaveLength(MAILS)
  const byId = new Map<string, Set<string>>()
  for (const { messageId, bytes } of smtp.kept) {
    // The boundary between the parts is drawn anew; all that anybody reads is not.
    const said = bytes.toString().replaceAll(/--_NmP-[0-9a-f]+-Part_\d+/g, '--')
    byId.set(messageId, (byId.get(messageId) ?? new Set()).add(said))
  }
  for (const { messageId, state } of rows) {
    expect(state).toBe('sent')
    expect(byId.get(messageId)?.size).toBe(1)
  }
  expect(byId.size).toBe(MAILS)
  const tries = await db.select().from(mailAttempt)
  expect(tries.filter(({ accepted }) => accepted).length).toBeGreaterThanOrEqual(MAILS)
}

it.each(SEEDS)(
  'a worker killed before, amid and after handing messages over loses none (seed %i)',
  async (seed) => {
    await enqueueMany()
    // Dies at a message begun, then at one kept but not confirmed, each at another place of the queue.
    const moments = ['onBegin', 'onKept'] as const
    for (const [salt, moment] of moments.entries()) {
      let left = 1 + Math.floor(shareOf(seed, salt) * (MAILS / 3))
      const reached = new Promise<void>((resolve) => {
        smtp[moment] = () => {
          left -= 1
          if (left === 0) resolve()
          // From there on the server waits, so that the worker dies at this place and no later.
          if (left <= 0) return moment === 'onKept' ? pause(60_000) : undefined
        }
      })
      const child = await startWorker()
      await reached
      await kill(child)
      smtp.onBegin = () => {}
      smtp.onKept = () => {}
      await letTimePass()
    }
    await drain()
    await expectNoneLost()
  },
  WITHIN_MS,
)

it.each(SEEDS)(
  'a mail server that refuses, stalls and hangs up at any moment gets every mail in the end (seed %i)',
  async (seed) => {
    await enqueueMany()
    const transport = openTransport(smtp.url, { silentMs: 150 })
    onTestFinished(() => transport.close())
    const sender = makeSender({
      db,
      transport,
      owner: 'troubled',
      signal: new AbortController().signal,
      undelivered: async () => {},
    })
    const troubles: Trouble[] = ['refuse', 'stall', 'drop', 'drop-after']
    let step = 0
    smtp.onBegin = () => {
      step += 1
      if (shareOf(seed, 100 + step) < 0.3)
        smtp.trouble = troubles[Math.floor(shareOf(seed, 500 + step) * troubles.length)] ?? 'drop'
      else smtp.trouble = 'none'
    }
    for (const first of troubles.toSorted((a, b) => shareOf(seed, a.length) - shareOf(seed, b.length))) {
      smtp.trouble = first
      await sender.step()
      await letTimePass()
    }
    await drain()
    await expectNoneLost()
  },
  WITHIN_MS,
)

it('a mail server that is away is not asked for every mail, and its return is found', async () => {
  await enqueueMany()
  const { port } = smtp
  await smtp.stop()
  const transport = openTransport(`smtp://127.0.0.1:${port}`, { silentMs: 500 })
  onTestFinished(() => transport.close())
  const sender = makeSender({
    db,
    transport,
    owner: 'alone',
    signal: new AbortController().signal,
    undelivered: async () => {},
  })
  expect(await sender.step()).toBeGreaterThan(1_000)
  const rows = await outbox(db)
  expect(rows.filter(({ attempts }) => attempts > 0).length).toBeLessThan(MAILS / 2)
  expect(rows.every(({ state, leaseOwner }) => state === 'waiting' && leaseOwner === null)).toBe(true)
  smtp = await startTroubledServer(port)
  await drain()
  await expectNoneLost()
})

it('a mailbox that is not there is given up at once and said, the others go', async () => {
  await enqueueTestMail(db, { personId: null, address: 'gone@example.test' }, { kind: 'notice' })
  smtp.trouble = 'never'
  const told: string[] = []
  const transport = openTransport(smtp.url)
  onTestFinished(() => transport.close())
  const sender = makeSender({
    db,
    transport,
    owner: 'alone',
    signal: new AbortController().signal,
    undelivered: async (_inside, { mail, final, answer }) =>
      void told.push(`${mail.address} ${final} ${answer}`),
  })
  await sender.step()
  expect((await outbox(db))[0]).toMatchObject({ state: 'failed', attempts: 1 })
  expect(told).toEqual([expect.stringMatching(/^gone@example\.test true .*550.*No mailbox/)])
})
