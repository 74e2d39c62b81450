/**
 * How fast is the log intake? Taking a night file in against a bare LOAD DATA of the same rows into the same table; a
 * large file against a small one, by line and by memory; a year of one channel on a screen against a day. Pairs are
 * interleaved, so that a busy machine slows both alike, and medians are shown.
 *
 * Part of `npm run bench`; alone `npx tsx tests/bench/intake.ts`, and with the word `large` only the large file. With
 * TEST_DATABASE_URL, as for the tests, it works in a database of its own beside that one and drops it at the end;
 * otherwise it starts a server. BENCH_LARGE_MIB (128) is the size of the large file; 1024 takes some minutes more.
 */
import { Readable } from 'node:stream'
import mysql from 'mysql2'
import { closeDb, getDb, getPool } from '#app/db/client.server.ts'
import { migrateDatabase } from '#app/db/migrate.server.ts'
import { binReadings } from '#app/db/queries/readings.server.ts'
import type { Actor } from '#app/domain/actor.ts'
import { emptyProfile } from '#app/domain/schemas/source-profile.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { stageUpload } from '#app/services/intake.server.ts'
import { acceptImport } from '#app/services/intake-decisions.server.ts'
import { makeRollups } from '#app/services/rollups.server.ts'
import { createChannel, createClock, createSite, createSource, createUser } from '#tests/support/factories.ts'
import { startOwnMariadb } from '#tests/support/own-mariadb.ts'
import { testDatabaseUrl } from '#tests/support/test-database-url.ts'
import { benchLarge } from './intake-large.ts'
import { CHANNEL_NAMES, CHANNELS, cell, NOW, nightFile, START_MS, STEP_MS } from './night-file.ts'

const PAIRS = 7
const LINES = 8_640
const signal = new AbortController().signal

process.env.SESSION_SECRET ??= 'a secret for the bench only, 32 or more'
process.env.LOG_LEVEL ??= 'silent'

function median(values: readonly number[]): number {
  return values.toSorted((a, b) => a - b)[values.length >> 1] ?? Number.NaN
}

async function seconds(work: () => Promise<unknown>): Promise<number> {
  const started = performance.now()
  await work()
  return (performance.now() - started) / 1000
}

async function* asStream(pieces: Iterable<Uint8Array>): AsyncGenerator<Uint8Array> {
  yield* pieces
}

/** The same readings as rows for LOAD DATA. */
function* bareRows(startMs: number, ids: readonly number[]): Generator<Buffer> {
  for (let line = 0; line < LINES; line += 1) {
    const at = new Date(startMs + line * STEP_MS).toISOString().replace('T', ' ').slice(0, 23)
    yield Buffer.from(
      ids
        .map((id, channel) => `${id}\t${at}\t0\t${cell(line, channel)}\t\\N\t0\t0\t1\t${line + 2}\n`)
        .join(''),
    )
  }
}

function loadBare(rows: readonly Buffer[]): Promise<number> {
  return new Promise((resolve, reject) => {
    getPool().query<mysql.ResultSetHeader>(
      {
        sql: `LOAD DATA LOCAL INFILE 'readings' INTO TABLE reading CHARACTER SET ascii
          (channel_id, at, seq, value, bound, quality, marks, import_id, line_no)`,
        infileStreamFactory: () => Readable.from(rows, { objectMode: true }),
      },
      (error, result) => (error === null ? resolve(result.affectedRows) : reject(error)),
    )
  })
}

interface Site {
  actor: Actor
  ids: number[]
  otherIds: number[]
}

async function prepare(): Promise<Site> {
  const db = getDb()
  await createSite(db)
  await createClock(db, { baseAt: NOW, baseMachineAt: machineNow() })
  const actor = await createUser(db, { roles: ['technician'] })
  const [source, other] = [await createSource(db, { code: 'NL-B' }), await createSource(db)]
  const ids: number[] = []
  const otherIds: number[] = []
  for (const name of CHANNEL_NAMES) {
    ids.push((await createChannel(db, { sourceId: source.id, name })).id)
    otherIds.push((await createChannel(db, { sourceId: other.id, name })).id)
  }
  return { actor, ids, otherIds }
}

function stage(actor: Actor, pieces: Iterable<Uint8Array>, options: { largeBytes?: number; name: string }) {
  return stageUpload(getDb(), actor, NOW, {
    sourceCode: 'NL-B',
    fileName: options.name,
    stream: asStream(pieces),
    statedBytes: null,
    limitBytes: 2 ** 40,
    largeBytes: options.largeBytes,
  })
}

/** From the press of Accept to visible and rolled up, against a bare load. */
async function benchAccept({ actor, otherIds }: Site): Promise<void> {
  const taken: number[] = []
  const bare: number[] = []
  const reading: number[] = []
  const rolled: number[] = []
  const truncate = () => getPool().promise().query('TRUNCATE TABLE reading')
  for (let pair = 0; pair <= PAIRS; pair += 1) {
    const startMs = START_MS + pair * LINES * STEP_MS
    const pieces = [...nightFile(startMs, LINES)]
    const rows = [...bareRows(startMs, otherIds)]
    const file = { importId: 0 }
    const read = await seconds(async () => {
      const staged = await stage(actor, pieces, { name: `NL-B_${pair}.csv`, largeBytes: 2 ** 40 })
      if (staged.state !== 'read') throw new Error(`The file of the bench was ${staged.state}`)
      file.importId = staged.importId
    })
    await truncate()
    const accept = async () => {
      const accepted = await acceptImport(getDb(), actor, NOW, file.importId)
      if (accepted.stored !== CHANNELS * LINES) throw new Error(`${accepted.stored} readings were stored`)
      rolled.push(await seconds(() => makeRollups(getDb(), signal)))
    }
    const load = async () => {
      if ((await loadBare(rows)) !== CHANNELS * LINES) throw new Error('Rows are missing from the bare load')
    }
    const order = pair % 2 === 0
    const first = await seconds(order ? accept : load)
    await truncate()
    const second = await seconds(order ? load : accept)
    // The first pair warms up caches and is not counted.
    if (pair === 0) continue
    taken.push(order ? first : second)
    bare.push(order ? second : first)
    reading.push(read)
  }
  const ratio = median(taken.map((value, index) => value / (bare[index] ?? Number.NaN)))
  console.log(`\nNight file of ${CHANNELS} channels and ${LINES} lines, median of ${PAIRS}`)
  console.log(`  received and read     ${median(reading).toFixed(2)} s`)
  console.log(
    `  taken in, rolled up   ${median(taken).toFixed(2)} s, ${median(rolled).toFixed(2)} s of it for the rollups`,
  )
  console.log(`  bare LOAD DATA        ${median(bare).toFixed(2)} s`)
  console.log(`  ratio ${ratio.toFixed(2)}, asked for at most 2.5: ${ratio <= 2.5 ? 'met' : 'MISSED'}`)
}

/** A year of one channel, minute by minute, in as many bins as a screen is wide, and a day of it. */
async function benchScreen({ otherIds }: Site): Promise<void> {
  const [channelId = 0] = otherIds
  await getPool().promise().query('TRUNCATE TABLE reading')
  const rows: Buffer[] = []
  for (let minute = 0; minute < 366 * 1_440; minute += 1) {
    const at = new Date(START_MS + minute * 60_000).toISOString().replace('T', ' ').slice(0, 23)
    rows.push(Buffer.from(`${channelId}\t${at}\t0\t${cell(minute, 1)}\t\\N\t0\t0\t1\t1\n`))
  }
  await loadBare(rows)
  const end = START_MS + 366 * 86_400_000
  await getPool()
    .promise()
    .query('INSERT INTO rollup_due (channel_id, from_at, to_at) VALUES (?, ?, ?)', [
      channelId,
      new Date(START_MS),
      new Date(end - 1),
    ])
  await makeRollups(getDb(), signal)
  const read = (days: number, binSeconds: number) => () =>
    binReadings(getDb(), {
      channelIds: [channelId],
      from: new Date(end - days * 86_400_000),
      to: new Date(end),
      binSeconds,
      logarithmic: true,
    })
  const [year, day]: [number[], number[]] = [[], []]
  for (let pair = 0; pair < 5 * PAIRS; pair += 1) {
    year.push(await seconds(read(364, 7_200 * 4)))
    day.push(await seconds(read(1, 60)))
  }
  const ratio = median(year) / median(day)
  console.log('\nOne channel on one screen: a year in steps of 8 hours, a day in steps of a minute')
  console.log(`  year ${(1000 * median(year)).toFixed(1)} ms, day ${(1000 * median(day)).toFixed(1)} ms`)
  console.log(`  ratio ${ratio.toFixed(2)}, asked for at most 2: ${ratio <= 2 ? 'met' : 'MISSED'}`)
}

async function dropDatabase(address: string): Promise<void> {
  const url = new URL(address)
  const admin = mysql
    .createConnection({
      host: url.hostname,
      port: Number(url.port || 3306),
      user: decodeURIComponent(url.username),
      password: decodeURIComponent(url.password),
    })
    .promise()
  await admin.query(`DROP DATABASE IF EXISTS \`${url.pathname.slice(1)}\``)
  await admin.end()
}

async function main(): Promise<void> {
  const given = process.env.TEST_DATABASE_URL
  const own =
    given === undefined || given === '' ? await startOwnMariadb(['--innodb-buffer-pool-size=256M']) : null
  const url = own === null ? testDatabaseUrl(0).replace(/_test_0$/, '_bench') : own.url('ebbline_bench')
  process.env.DATABASE_URL = url
  try {
    await dropDatabase(url)
    await migrateDatabase(url)
    const site = await prepare()
    await getPool()
      .promise()
      .query('UPDATE source SET profile = ?', [JSON.stringify(emptyProfile())])
    if (process.argv[2] !== 'large') {
      await benchAccept(site)
      await benchScreen(site)
    }
    await benchLarge(site.actor.personId, Number(process.env.BENCH_LARGE_MIB ?? '128'))
  } finally {
    await closeDb()
    await dropDatabase(url)
    await own?.end()
  }
}

await main()
