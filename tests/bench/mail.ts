/**
 * How fast does mail go out? A queue against a bare loop over the same pooled connections to the same mail fake, in
 * pairs one after the other, so that a busy machine slows both alike; and from the transaction that tells something to
 * the mail fake having it. Alone: `npx tsx tests/bench/mail.ts`. With TEST_DATABASE_URL, as for the tests, it works in a
 * database of its own beside that one and drops it at the end; otherwise it starts a server. BENCH_MAILS (10000) is the
 * length of the queue.
 */
import { spawn } from 'node:child_process'
import { setTimeout as sleep } from 'node:timers/promises'
import mysql from 'mysql2/promise'
import nodemailer from 'nodemailer'
import { closeDb, getDb, getPool } from '#app/db/client.server.ts'
import { migrateDatabase } from '#app/db/migrate.server.ts'
import { mailOutbox, person } from '#app/db/schema/index.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { makeSender } from '#app/worker/mail/sender.server.ts'
import { CONNECTIONS, openTransport } from '#app/worker/mail/transport.ts'
import { MORNING } from '#tests/support/clock.ts'
import { createSite } from '#tests/support/factories.ts'
import { readMail } from '#tests/support/mail.ts'
import { enqueueTestMail } from '#tests/support/mails.ts'
import { startOwnMariadb } from '#tests/support/own-mariadb.ts'
import { testDatabaseUrl } from '#tests/support/test-database-url.ts'

const PAIRS = 7
const MAILS = Number(process.env.BENCH_MAILS ?? '10000')
/** So many to each person: within the flood guard, which would else fold most of the queue. */
const EACH = 5
const LATENCIES = 50
const TEXT = 'SG-05  spread 24 °C (limit 20)\nSince: 2026-11-09 02:14 local (01:14 UTC).\n'.repeat(8)
const HTML = `<p>${TEXT}</p>`

process.env.SESSION_SECRET ??= 'a secret for the bench only, 32 or more'
process.env.LOG_LEVEL ??= 'silent'

function median(values: readonly number[]): number {
  return values.toSorted((a, b) => a - b)[values.length >> 1] ?? Number.NaN
}

interface Fake {
  smtpUrl: string
  httpUrl: string
  stop(): void
}

/** In a process of its own, as the product has it. */
function startFake(): Promise<Fake> {
  const child = spawn(process.execPath, ['--import', 'tsx', 'app/mail/fake-main.ts'], {
    stdio: ['ignore', 'inherit', 'inherit', 'ipc'],
  })
  return new Promise((resolve, reject) => {
    child.once('exit', () => reject(new Error('The mail fake did not start.')))
    child.once('message', (facts) => resolve({ ...(facts as Fake), stop: () => void child.kill() }))
  })
}

async function preparePeople(): Promise<number[]> {
  const count = Math.ceil(MAILS / EACH)
  for (let first = 0; first < count; first += 500) {
    const some = Array.from({ length: Math.min(500, count - first) }, (_, n) => ({
      name: `Person ${first + n}`,
      email: `p${first + n}@example.test`,
      createdAt: MORNING,
    }))
    await getDb().insert(person).values(some)
  }
  const rows = await getDb().select({ id: person.id }).from(person)
  return rows.map(({ id }) => id)
}

async function fillQueue(people: readonly number[], round: number): Promise<void> {
  await getPool().promise().query('DELETE FROM mail_attempt')
  await getPool().promise().query('DELETE FROM mail_outbox')
  const sendAt = machineNow()
  for (let first = 0; first < MAILS; first += 500) {
    const rows = Array.from({ length: Math.min(500, MAILS - first) }, (_, n) => {
      const i = first + n
      const to = Math.floor(i / EACH)
      return {
        messageId: `<${round.toString(16).padStart(2, '0')}${i.toString(16).padStart(30, '0')}@tst.example>`,
        kind: 'alert' as const,
        priority: 'high' as const,
        state: 'waiting' as const,
        personId: people[to] ?? null,
        address: `p${to}@example.test`,
        groupKey: `segment:SG-${i % EACH}`,
        subject: `[TST] HIGH SG-${i % EACH} spread 24 C (limit 20) since 02:14 +0100`,
        text: TEXT,
        html: HTML,
        headers: {},
        createdAt: MORNING,
        sendAt,
      }
    })
    await getDb().insert(mailOutbox).values(rows)
  }
}

/** @returns mails a second */
async function sendQueue(url: string): Promise<number> {
  const transport = openTransport(url)
  const { signal } = new AbortController()
  const sender = makeSender({ db: getDb(), transport, owner: 'bench', signal, undelivered: async () => {} })
  const started = performance.now()
  while ((await sender.step()) === 0);
  const rate = MAILS / ((performance.now() - started) / 1000)
  transport.close()
  const [rows] = await getPool().promise().query("SELECT COUNT(*) AS n FROM mail_outbox WHERE state = 'sent'")
  const sent = (rows as { n: number }[])[0]?.n
  if (sent !== MAILS) throw new Error(`Of ${MAILS} mails ${sent} were sent.`)
  return rate
}

/** The same message by the mail library alone. @returns mails a second */
async function sendBare(url: string): Promise<number> {
  const pool = nodemailer.createTransport({
    pool: true,
    url,
    maxConnections: CONNECTIONS,
    maxMessages: Number.POSITIVE_INFINITY,
  } as Parameters<typeof nodemailer.createTransport>[0])
  const started = performance.now()
  let next = 0
  const hand = async () => {
    while (next < MAILS) {
      const i = next++
      await pool.sendMail({
        from: { name: 'Test site vacuum log', address: 'alerts@tst.example' },
        to: `p${Math.floor(i / EACH)}@example.test`,
        subject: `[TST] HIGH SG-${i % EACH} spread 24 C (limit 20) since 02:14 +0100`,
        text: TEXT,
        html: HTML,
      })
    }
  }
  await Promise.all(Array.from({ length: CONNECTIONS * 2 }, hand))
  const rate = MAILS / ((performance.now() - started) / 1000)
  pool.close()
  return rate
}

async function benchRate(fake: Fake, people: readonly number[]): Promise<void> {
  const own: number[] = []
  const bare: number[] = []
  const shares: number[] = []
  for (let pair = 0; pair <= PAIRS; pair += 1) {
    await fillQueue(people, pair)
    const other = await sendBare(fake.smtpUrl)
    const ours = await sendQueue(fake.smtpUrl)
    // The first pair warms both up.
    if (pair === 0) continue
    own.push(ours)
    bare.push(other)
    shares.push(ours / other)
  }
  const share = median(shares)
  console.log(`\n${MAILS} queued mails to the mail fake, one worker, ${CONNECTIONS} connections`)
  console.log(`  queue ${median(own).toFixed(0)} a second, bare loop ${median(bare).toFixed(0)} a second`)
  console.log(
    `  share ${(100 * share).toFixed(0)} % (pairs ${(100 * Math.min(...shares)).toFixed(0)} to ${(100 * Math.max(...shares)).toFixed(0)}), ` +
      `asked for 60: ${share >= 0.6 ? 'met' : 'MISSED'}`,
  )
}

/** From the commit of what is told to the mail fake having it, with a worker that has nothing else to do. */
async function benchLatency(fake: Fake): Promise<void> {
  const stopping = new AbortController()
  const transport = openTransport(fake.smtpUrl)
  const sender = makeSender({
    db: getDb(),
    transport,
    owner: 'bench',
    signal: stopping.signal,
    undelivered: async () => {},
  })
  const work = (async () => {
    while (!stopping.signal.aborted) await sleep(await sender.step())
  })()
  const waits: number[] = []
  for (let n = 0; n < LATENCIES; n += 1) {
    const subject = `latency ${n} of ${process.pid}`
    // So that it falls anywhere between two looks of the worker.
    await sleep(Math.random() * 700)
    const started = performance.now()
    await enqueueTestMail(
      getDb(),
      { personId: null, address: 'late@example.test' },
      { priority: 'highest', subject },
    )
    for (;;) {
      const [newest] = await readMail(fake.httpUrl)
      if (newest?.subject === subject) break
      await sleep(5)
    }
    waits.push(performance.now() - started)
  }
  stopping.abort()
  await work
  transport.close()
  console.log('\nFrom telling to the mail fake having it, idle system')
  console.log(
    `  median ${median(waits).toFixed(0)} ms, worst of ${LATENCIES} ${Math.max(...waits).toFixed(0)} ms`,
  )
}

async function dropDatabase(address: string): Promise<void> {
  const url = new URL(address)
  const admin = await mysql.createConnection({
    host: url.hostname,
    port: Number(url.port || 3306),
    user: decodeURIComponent(url.username),
    password: decodeURIComponent(url.password),
  })
  await admin.query(`DROP DATABASE IF EXISTS \`${url.pathname.slice(1)}\``)
  await admin.end()
}

async function main(): Promise<void> {
  const given = process.env.TEST_DATABASE_URL
  const own = given === undefined || given === '' ? await startOwnMariadb([]) : null
  const url = own === null ? testDatabaseUrl(0).replace(/_test_0$/, '_bench_mail') : own.url('ebbline_bench')
  process.env.DATABASE_URL = url
  const fake = await startFake()
  try {
    await dropDatabase(url)
    await migrateDatabase(url)
    await createSite(getDb())
    await benchRate(fake, await preparePeople())
    await getPool().promise().query('DELETE FROM mail_attempt')
    await getPool().promise().query('DELETE FROM mail_outbox')
    await fetch(`${fake.httpUrl}/messages`, { method: 'DELETE' })
    await benchLatency(fake)
  } finally {
    await closeDb()
    await dropDatabase(url)
    await own?.end()
    fake.stop()
  }
}

await main()
