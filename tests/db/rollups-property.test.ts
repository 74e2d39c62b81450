/** Rollups after any sequence of late files, withdrawals and corrections against the same worked out from the readings. */
import { asc } from 'drizzle-orm'
import { beforeEach, expect, it } from 'vitest'
import { listMaps } from '#app/db/queries/register-maps.server.ts'
import { reading, rollup, rollupDue } from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import { spanAt } from '#app/domain/dated-spans.ts'
import { isUsable, type Quality, qualityWord } from '#app/domain/readings.ts'
import { ROLLUP_LEVELS } from '#app/domain/rollups.ts'
import { stageUpload } from '#app/services/intake.server.ts'
import { acceptImport } from '#app/services/intake-decisions.server.ts'
import { agreeWithdrawal, askWithdrawal, withdrawImport } from '#app/services/intake-withdrawal.server.ts'
import { mapChannel } from '#app/services/register-maps.server.ts'
import { makeRollups } from '#app/services/rollups.server.ts'
import { NL_E } from '#tests/fixtures/night-files/profiles.ts'
import { MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import {
  createChannel,
  createPosition,
  createSite,
  createSource,
  createUser,
} from '#tests/support/factories.ts'

const db = freshDatabase()
const { signal } = new AbortController()
const SEEDS = Array.from({ length: 20 }, (_, i) => i + 1)
const STEPS = 7
const FROM_MS = Date.UTC(2026, 10, 6)
const WINDOW_MS = 2.5 * 86_400_000
const NAMES = ['HC-16A', 'HC-16B'] as const

let people: Record<'technician' | 'engineer' | 'administrator', Actor>
let channelIds: number[]

beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  people = {
    technician: await createUser(db, { roles: ['technician'] }),
    engineer: await createUser(db, { roles: ['engineer'] }),
    administrator: await createUser(db, { roles: ['administrator'] }),
  }
  const east = await createSource(db, { code: 'NL-E', profile: NL_E, profileVersion: 1 })
  channelIds = []
  for (const name of NAMES) {
    const { id: positionId } = await createPosition(db, { tag: name })
    channelIds.push((await createChannel(db, { sourceId: east.id, name, positionId })).id)
  }
})

/** The same numbers at every run (Park and Miller's generator). */
function random(seed: number): () => number {
  let state = seed * 7_919
  return () => {
    state = (state * 48_271) % 2_147_483_647
    return state / 2_147_483_647
  }
}

/** A file over some stretch of the window, which may be older than what is held, overlap it and contradict it. */
function someFile(next: () => number): string {
  const lines = ['epoch_ms,channel,value,unit,status']
  // Whole minutes, so that files meet at the same instants.
  let atMs = FROM_MS + Math.floor((next() * WINDOW_MS) / 60_000) * 60_000
  const rows = 5 + Math.floor(next() * 60)
  for (let row = 0; row < rows; row += 1) {
    const name = NAMES[Math.floor(next() * 2)]
    const status = next() < 0.12 ? 'OVER' : 'OK'
    // Few different values, so that some of what meets is the same and some is not.
    const value = `${1 + Math.floor(next() * 3)}.5e-0${7 + Math.floor(next() * 2)}`
    lines.push(`${atMs},${name},${value},Pa,${status}`)
    atMs += (1 + Math.floor(next() * next() * 120)) * 60_000
  }
  return `${lines.join('\n')}\n`
}

async function takeIn(text: string, fileName: string): Promise<number | null> {
  async function* stream() {
    yield new TextEncoder().encode(text)
  }
  const staged = await stageUpload(db, people.technician, MORNING, {
    sourceCode: 'NL-E',
    fileName,
    stream: stream(),
    statedBytes: null,
    limitBytes: 2 ** 20,
  })
  if (staged.state !== 'read') return null
  await acceptImport(db, people.technician, MORNING, staged.importId)
  return staged.importId
}

async function withdraw(importId: number): Promise<void> {
  await askWithdrawal(db, people.technician, MORNING, importId, 'wrong gauge in the file')
  await agreeWithdrawal(db, people.engineer, MORNING, importId)
  await withdrawImport(db, people.administrator, MORNING, importId)
}

type Row = Record<string, number | null>

/** Every rollup, worked out from the readings one by one; keys in the order of channel, level and instant. */
async function recomputed(): Promise<Map<string, Row>> {
  const rows = await db.select().from(reading).orderBy(asc(reading.channelId), asc(reading.at))
  const made = new Map<string, Row>()
  for (const level of ROLLUP_LEVELS) {
    for (const { channelId, at, value, quality, marks } of rows) {
      const bucket = Math.floor(at.getTime() / 1000 / level) * level * 1000
      const key = `${channelId} ${level} ${bucket}`
      const row = made.get(key) ?? { usable: 0, min: null, max: null, sum: 0, positive: 0, sumLn: 0 }
      made.set(key, row)
      const word: Quality = qualityWord(quality)
      row[word] = (row[word] ?? 0) + 1
      if (value === null || !isUsable(word, marks)) continue
      row.usable = (row.usable ?? 0) + 1
      row.min = Math.min(row.min ?? value, value)
      row.max = Math.max(row.max ?? value, value)
      row.sum = (row.sum ?? 0) + value
      row.positive = (row.positive ?? 0) + (value > 0 ? 1 : 0)
      row.sumLn = (row.sumLn ?? 0) + Math.log(value)
    }
  }
  return made
}

async function expectRight(): Promise<void> {
  await makeRollups(db, signal)
  expect(await db.select().from(rollupDue)).toEqual([])
  const expected = await recomputed()
  const found = await db.select().from(rollup)
  expect(found.map((row) => `${row.channelId} ${row.levelSeconds} ${row.at.getTime()}`).sort()).toEqual(
    [...expected.keys()].sort(),
  )
  for (const row of found) {
    const other = expected.get(`${row.channelId} ${row.levelSeconds} ${row.at.getTime()}`)
    expect(row).toMatchObject({
      usable: other?.usable,
      min: other?.min,
      max: other?.max,
      positive: other?.positive,
      minPositive: other?.min,
      good: other?.good ?? 0,
      overRange: other?.['over-range'] ?? 0,
      suspect: other?.suspect ?? 0,
    })
    expect(row.sum).toBeCloseTo(other?.sum ?? Number.NaN, 15)
    expect(row.sumLn).toBeCloseTo(other?.sumLn ?? Number.NaN, 8)
  }
}

/** Exchanges the positions of the two channels from an instant on, each time a later one. */
async function exchange(turn: number): Promise<void> {
  const startsAt = new Date(FROM_MS + turn * 5 * 3_600_000)
  const [first = 0, second = 0] = channelIds
  const maps = await listMaps(db, { channelId: first })
  await mapChannel(db, people.engineer, MORNING, first, {
    seen: Math.max(0, ...maps.map(({ id }) => id)),
    position: spanAt(await listMaps(db, { channelId: second }), startsAt)?.position ?? '',
    startsAt,
    endsAt: null,
    other: 'exchange',
    reason: 'Cables found crossed',
  })
}

it.each(SEEDS)('are those of the readings, whatever came, went or was corrected (seed %i)', async (seed) => {
  const next = random(seed)
  const accepted: number[] = []
  const done = { files: 0, withdrawn: 0 }
  for (let step = 0; step < STEPS; step += 1) {
    const sort = next()
    if (accepted.length > 0 && sort < 0.3) {
      const [importId = 0] = accepted.splice(Math.floor(next() * accepted.length), 1)
      await withdraw(importId)
      done.withdrawn += 1
    } else if (accepted.length > 0 && sort < 0.4) {
      const before = await db.select().from(reading)
      await exchange(step + 1)
      expect(await db.select().from(reading)).toEqual(before)
    } else {
      const importId = await takeIn(someFile(next), `step-${step}.csv`)
      if (importId !== null) accepted.push(importId)
      done.files += 1
    }
    // Sometimes several changes wait for the worker together.
    if (next() < 0.5) await expectRight()
  }
  await expectRight()
  expect(done.files).toBeGreaterThan(0)
  expect(accepted.length + done.withdrawn).toBe(done.files)
})
