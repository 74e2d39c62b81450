/**
 * Ready-made rows with unique names, for tests. Each takes what a test cares about and fills in the rest. They write
 * tables directly, because a test of one service should not hang on another.
 */
import { hashPassword } from '#app/auth/password.ts'
import type { DbOrTx } from '#app/db/client.server.ts'
import {
  channel,
  channelMap,
  fitting,
  instrument,
  line,
  person,
  position,
  productClock,
  roleGrant,
  segment,
  segmentState,
  site,
  source,
} from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import { channelKey } from '#app/domain/register.ts'
import type { Role } from '#app/domain/roles.ts'
import { MORNING } from './clock.ts'

/** The password of everybody made here. */
export const PASSWORD = 'tube-length-2560'

/** Far in the past of every test: maps and grants begin here unless a test says otherwise. */
const LONG_AGO = new Date('2025-01-01T00:00:00.000Z')

// The cheapest cost the library allows: tests sign in often.
let passwordHash: Promise<string> | undefined
function cheapHash(): Promise<string> {
  passwordHash ??= hashPassword(PASSWORD, { memoryCost: 1024, timeCost: 2, parallelism: 1 })
  return passwordHash
}

let serial = 0
function unique(prefix: string): string {
  serial += 1
  return `${prefix}${serial}`
}

export interface TestUser extends Actor {
  email: string
}

/** A person with an account and the roles given, granted long ago and for good. Usable as an actor. */
export async function createUser(
  db: DbOrTx,
  options: { roles?: readonly Role[]; name?: string; endsAt?: Date; noPassword?: boolean } = {},
): Promise<TestUser> {
  const name = options.name ?? unique('Person ')
  const email = `${name.toLowerCase().replaceAll(' ', '.')}@example.test`
  const [result] = await db.insert(person).values({
    name,
    email,
    passwordHash: options.noPassword ? null : await cheapHash(),
    endsAt: options.endsAt ?? null,
    createdAt: LONG_AGO,
  })
  const personId = result.insertId
  const roles = options.roles ?? []
  for (const role of roles) {
    await db
      .insert(roleGrant)
      .values({ personId, role, startsAt: LONG_AGO, grantedAt: LONG_AGO, reason: 'for a test' })
  }
  return { personId, name, email, roles }
}

/** The site's row. */
export async function createSite(db: DbOrTx, options: { timeZone?: string } = {}): Promise<number> {
  const [result] = await db.insert(site).values({
    code: 'TST',
    name: 'Test site',
    timeZone: options.timeZone ?? 'Europe/Berlin',
    ambientC: 20,
  })
  return result.insertId
}

/** The product clock, standing where a test wants it (a demo clock unless told otherwise). */
export async function createClock(
  db: DbOrTx,
  options: { baseAt?: Date; baseMachineAt: Date; demo?: boolean },
): Promise<void> {
  const baseAt = options.baseAt ?? MORNING
  await db.insert(productClock).values({
    id: 1,
    demo: options.demo ?? true,
    baseAt,
    baseMachineAt: options.baseMachineAt,
    seenAt: baseAt,
  })
}

export async function createLine(
  db: DbOrTx,
  options: { code?: string; lengthM?: number } = {},
): Promise<number> {
  const code = options.code ?? unique('L')
  const [result] = await db
    .insert(line)
    .values({ code, name: `Line ${code}`, lengthM: options.lengthM ?? 2560, sortOrder: serial })
  return result.insertId
}

/** A segment; makes a line for it when none is named. */
export async function createSegment(
  db: DbOrTx,
  options: Partial<typeof segment.$inferInsert> = {},
): Promise<{ id: number; tag: string; lineId: number }> {
  const lineId = options.lineId ?? (await createLine(db))
  const tag = options.tag ?? unique('SG-T')
  const [result] = await db.insert(segment).values({
    startM: 0,
    endM: 160,
    innerDiameterM: 1.2,
    wallM: 0.004,
    steel: '304L',
    vacuumFired: true,
    hydrogenModel: 'low-hydrogen',
    hydrogenQ20: 1e-11,
    hydrogenOrigin: 'made up for a test',
    waterCapacity: 1e19,
    waterOrigin: 'made up for a test',
    bellowsCount: 8,
    bellowsTravelMm: 40,
    bellowsRatedMm: 60,
    insulationM: 0.15,
    insulationWPerMK: 0.04,
    resistance20Ohm: 0.008,
    sortOrder: serial,
    ...options,
    lineId,
    tag,
  })
  return { id: result.insertId, tag, lineId }
}

/** A state of a segment, open unless it is said when it ended. */
export async function createState(
  db: DbOrTx,
  options: {
    segmentId: number
    setBy: number
    state: typeof segmentState.$inferInsert.state
    since?: Date
    endedAt?: Date
  },
): Promise<void> {
  const since = options.since ?? LONG_AGO
  await db.insert(segmentState).values({ ...options, since, reason: 'for a test', recordedAt: since })
}

export async function createPosition(
  db: DbOrTx,
  options: Partial<typeof position.$inferInsert> = {},
): Promise<{ id: number; tag: string }> {
  const tag = options.tag ?? unique('HC-T')
  const [result] = await db
    .insert(position)
    .values({ kind: 'hot-cathode', quantity: 'pressure', chainageM: 80, ...options, tag })
  return { id: result.insertId, tag }
}

export async function createInstrument(
  db: DbOrTx,
  options: Partial<typeof instrument.$inferInsert> = {},
): Promise<number> {
  const [result] = await db
    .insert(instrument)
    .values({ serial: unique('T-'), kind: 'hot-cathode', quantity: 'pressure', ...options })
  return result.insertId
}

/** An instrument put at a position. */
export async function createFitting(
  db: DbOrTx,
  options: { positionId: number; instrumentId: number; factor?: number; startsAt?: Date; endsAt?: Date },
): Promise<void> {
  const startsAt = options.startsAt ?? LONG_AGO
  await db.insert(fitting).values({ ...options, startsAt, reason: 'for a test', recordedAt: startsAt })
}

export async function createSource(
  db: DbOrTx,
  options: Partial<typeof source.$inferInsert> = {},
): Promise<{ id: number; code: string }> {
  const code = options.code ?? unique('NL-T')
  const [result] = await db
    .insert(source)
    .values({ name: `Logger ${code}`, periodSeconds: 60, ...options, code })
  return { id: result.insertId, code }
}

/** A channel of a source, mapped to a position when one is named. */
export async function createChannel(
  db: DbOrTx,
  options: { sourceId: number; name?: string; positionId?: number; mappedFrom?: Date; mappedTo?: Date },
): Promise<{ id: number; name: string }> {
  const name = options.name ?? unique('HC_T')
  const [result] = await db
    .insert(channel)
    .values({ sourceId: options.sourceId, name, nameKey: channelKey(name), quantity: 'pressure' })
  if (options.positionId !== undefined) {
    const startsAt = options.mappedFrom ?? LONG_AGO
    await db.insert(channelMap).values({
      channelId: result.insertId,
      positionId: options.positionId,
      startsAt,
      endsAt: options.mappedTo ?? null,
      reason: 'for a test',
      recordedAt: startsAt,
    })
  }
  return { id: result.insertId, name }
}
