/** Two people who take in overlapping files that contradict each other at the same instant. */
import { asc } from 'drizzle-orm'
import { expect, it } from 'vitest'
import { reading } from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import { stageUpload } from '#app/services/intake.server.ts'
import { acceptImport } from '#app/services/intake-decisions.server.ts'
import { NL_E } from '#tests/fixtures/night-files/profiles.ts'
import { MORNING } from '#tests/support/clock.ts'
import { cleanDatabase, freshDatabase, secondConnection } from '#tests/support/db.ts'
import { createChannel, createSite, createSource, createUser } from '#tests/support/factories.ts'
import { FAULT_SEEDS, shareOf } from '#tests/support/intake-faults.ts'

const db = freshDatabase()
const other = secondConnection()
const START_MS = 1_794_204_000_000
const ROWS = 400

/** Rows of a stretch of seconds; every so often a value that is the file's own and so contradicts the other's. */
function fileOf(seed: number, which: number): Uint8Array {
  const from = Math.floor(shareOf(seed, 10 + which) * 200)
  const lines = Array.from({ length: ROWS }, (_, i) => {
    const second = from + i
    const own = shareOf(seed * 1_000 + which, second) < 0.1
    return `${START_MS + second * 1_000},HC-16A,${own ? `9.${which}` : `1.${second % 10}`}e-07,Pa,OK`
  })
  return new TextEncoder().encode(`epoch_ms,channel,value,unit,status\n${lines.join('\n')}\n`)
}

interface Waiting {
  technician: Actor
  engineer: Actor
  first: number
  second: number
}

async function receiveBoth(seed: number): Promise<Waiting> {
  await cleanDatabase()
  await createSite(db, { timeZone: 'Europe/Vienna' })
  const technician = await createUser(db, { roles: ['technician'], name: 'Tilda Weir' })
  const engineer = await createUser(db, { roles: ['engineer'], name: 'Edda Holm' })
  const east = await createSource(db, { code: 'NL-E', profile: NL_E, profileVersion: 1 })
  await createChannel(db, { sourceId: east.id, name: 'HC-16A' })
  const receive = async (which: number) => {
    const bytes = fileOf(seed, which)
    async function* stream() {
      yield bytes
    }
    const { importId } = await stageUpload(db, technician, MORNING, {
      sourceCode: 'NL-E',
      fileName: `file-${which}.csv`,
      stream: stream(),
      statedBytes: bytes.length,
      limitBytes: 2 ** 26,
    })
    return importId
  }
  return { technician, engineer, first: await receive(1), second: await receive(2) }
}

/** What is stored, with the file that each reading came in by. */
async function stored({ first }: Waiting): Promise<string[]> {
  const rows = await db.select().from(reading).orderBy(asc(reading.at), asc(reading.seq))
  return rows.map(
    ({ at, seq, value, marks, importId, lineNo }) =>
      `${at.getTime()} ${seq} ${value} ${marks} ${importId === first ? 'first' : 'second'} ${lineNo}`,
  )
}

it.each(FAULT_SEEDS)('the outcome is that of one after the other (seed %i)', async (seed) => {
  const outcomes: string[][] = []
  for (const order of ['first', 'second'] as const) {
    const waiting = await receiveBoth(seed)
    await acceptImport(db, waiting.technician, MORNING, waiting[order])
    await acceptImport(db, waiting.engineer, MORNING, waiting[order === 'first' ? 'second' : 'first'])
    outcomes.push(await stored(waiting))
  }
  // The two orders differ in which of two contradicting readings stands first, or the test would show nothing.
  expect(outcomes[0]).not.toEqual(outcomes[1])

  const waiting = await receiveBoth(seed)
  await Promise.all([
    acceptImport(db, waiting.technician, MORNING, waiting.first),
    acceptImport(other, waiting.engineer, MORNING, waiting.second),
  ])
  expect(outcomes).toContainEqual(await stored(waiting))
})
