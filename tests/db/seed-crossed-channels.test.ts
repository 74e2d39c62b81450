import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { closeDb, type Db, getDb } from '#app/db/client.server.ts'
import { listChannels } from '#app/db/queries/register-maps.server.ts'
import { channelMapSchema } from '#app/domain/schemas/register-dated.ts'
import { compareChannels } from '#app/services/crossed-channels.server.ts'
import { readChannelFindings, readCrossedFindings } from '#app/services/crossed-suggestions.server.ts'
import { seededDemo } from '../support/demo-database.ts'

const MORNING = new Date('2026-11-09T07:00:00.000Z')
/** When the two cables of the demo went into each other's socket, 10:40 of its own time. */
const CROSSED_SINCE = new Date('2026-10-20T08:40:00.000Z')
const DAY_MS = 86_400_000

let db: Db
beforeAll(async () => {
  process.env.DATABASE_URL = await seededDemo()
  process.env.SESSION_SECRET ??= 'a secret for tests only, 32 or more'
  process.env.LOG_LEVEL ??= 'silent'
  db = getDb()
}, 600_000)
afterAll(closeDb)

async function channelNamed(name: string) {
  const found = (await listChannels(db)).find((one) => one.name === name && one.sourceCode === 'NL-W')
  if (found === undefined) throw new Error(`The demo has no channel ${name}`)
  return found
}

describe('the demo’s hot-cathode channels against their neighbours’', () => {
  it('name the one crossed pair and no other, with its begin', async () => {
    const { pairs } = await compareChannels(db, MORNING)
    const named = pairs.flatMap(({ x, y, judgement }) =>
      judgement.kind === 'suspected' ? [{ pair: [x.position, y.position], judgement }] : [],
    )
    expect(named.map(({ pair }) => pair)).toEqual([['HC-03B', 'HC-04A']])
    const [judgement] = named.map((one) => one.judgement)
    expect(judgement?.confidence).toBe('strong')
    expect(Math.abs((judgement?.begin.byMs ?? 0) - CROSSED_SINCE.getTime())).toBeLessThan(DAY_MS)
    // Four pairs at each of the fourteen joints between segments of one line that one logger reads.
    expect(pairs).toHaveLength(56)
  }, 120_000)

  it('name nothing before the cables were touched', async () => {
    const { pairs } = await compareChannels(db, new Date(CROSSED_SINCE.getTime() - 3_600_000))
    expect(pairs.filter(({ judgement }) => judgement.kind === 'suspected')).toEqual([])
  }, 120_000)

  it('name the pair two days after, when nobody has seen it yet', async () => {
    const { suggestions } = await readCrossedFindings(
      db,
      new Date(CROSSED_SINCE.getTime() + 2 * DAY_MS),
      'SG-04',
    )
    expect(suggestions.map(({ x, y }) => [x.position, y.position])).toEqual([['HC-03B', 'HC-04A']])
  }, 60_000)
})

describe('the suggestion on a channel’s page', () => {
  it('leads to a form that the channel map takes as it is', async () => {
    const channel = await channelNamed('HC-04A')
    const findings = await readChannelFindings(db, MORNING, channel.id)
    const [one, ...more] = findings?.suggestions ?? []
    expect(more).toEqual([])
    const [path, rest] = (one?.to ?? '').split('?')
    expect(path).toBe(`/register/channels/${channel.id}`)
    const typed = Object.fromEntries(new URLSearchParams(rest?.replace(/#.*$/, '')))
    expect(typed.position).toBe('HC-03B')
    const form = channelMapSchema('Europe/Vienna').parse({ ...typed, seen: 0, endsAt: '' })
    expect(form.other).toBe('exchange')
    expect(Math.abs(form.startsAt.getTime() - CROSSED_SINCE.getTime())).toBeLessThan(DAY_MS)
    expect(one?.evidence[0]).toMatch(/HC-03B left its place among the gauges of SG-03/)
    expect(one?.nearby.map(({ text }) => text).join(' ')).toMatch(/Gauge cables of SG-03 and SG-04/)
  }, 60_000)

  it('is not made for a channel that stands right, and says what was compared', async () => {
    const findings = await readChannelFindings(db, MORNING, (await channelNamed('HC-01A')).id)
    expect(findings?.suggestions).toEqual([])
    expect((findings?.clear ?? 0) + (findings?.notEvaluable.length ?? 0)).toBe(2)
  }, 60_000)

  it('is not asked for where the channel is no hot cathode', async () => {
    expect(await readChannelFindings(db, MORNING, (await channelNamed('CC-03')).id)).toBeNull()
  }, 60_000)
})
