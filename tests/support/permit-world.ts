/**
 * A tiny site on which a permit can live: one line with one segment and its supply, people with their competences, and
 * every threshold adopted. Locks, tests and statements go straight into the tables; how people make them is tested
 * elsewhere.
 */
import type { DbOrTx } from '#app/db/client.server.ts'
import { findPermit } from '#app/db/queries/permits.server.ts'
import {
  adoptedThreshold,
  competence,
  heatingStatement,
  isolationPoint,
  lockInUse,
  permitTest,
  roleGrant,
  supplySet,
} from '#app/db/schema/index.ts'
import { THRESHOLD_KEYS, THRESHOLDS } from '#app/domain/hazard-thresholds.ts'
import type { PermitContent } from '#app/domain/permit-content.ts'
import { COMPETENCE_KINDS, HAZARD_KEYS } from '#app/domain/permit-words.ts'
import { after, MORNING } from './clock.ts'
import { createLine, createSegment, createSite, createUser, type TestUser } from './factories.ts'
import { fullContent } from './permit-content.ts'

const YEARS_AGO = new Date('2024-01-01T00:00:00.000Z')
const FAR = new Date('2031-01-01T00:00:00.000Z')

export interface PermitWorld {
  segmentId: number
  /** Drafts and asks. */
  bram: TestUser
  /** Named as holder and as deputy. */
  pim: TestUser
  corwin: TestUser
  /** Hangs locks; verifies nothing. */
  odalys: TestUser
  /** Verifies; neither holder nor officer. */
  nerys: TestUser
  /** Safety officers. */
  ione: TestUser
  rafe: TestUser
  magnus: TestUser
}

/** The site with its people, granted long ago by somebody else. */
export async function createPermitWorld(db: DbOrTx): Promise<PermitWorld> {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  const lineId = await createLine(db, { code: 'L-P' })
  const { id: segmentId } = await createSegment(db, { tag: 'SG-T1', lineId, startM: 0, endM: 150 })
  await db.insert(supplySet).values({ tag: 'HX-1', maxAmps: 1500, maxVolts: 60, openCircuitVolts: 75 })
  const make = (name: string, roles: TestUser['roles']) => createUser(db, { name, roles })
  const world: PermitWorld = {
    segmentId,
    bram: await make('Bram', ['engineer']),
    pim: await make('Pim', ['technician']),
    corwin: await make('Corwin', ['technician']),
    odalys: await make('Odalys', ['technician']),
    nerys: await make('Nerys', ['technician']),
    ione: await make('Ione', ['safety-officer']),
    rafe: await make('Rafe', ['safety-officer']),
    magnus: await make('Magnus', ['manager']),
  }
  await db.insert(adoptedThreshold).values(
    THRESHOLD_KEYS.map((thresholdKey) => ({
      thresholdKey,
      value: THRESHOLDS[thresholdKey].usual ?? THRESHOLDS[thresholdKey].most,
      unit: THRESHOLDS[thresholdKey].unit,
      source: 'for a test',
      edition: 'one',
      adoptedBy: world.ione.personId,
      adoptedAt: YEARS_AGO,
      reviewAt: FAR,
      reason: 'for a test',
    })),
  )
  const people = [
    world.bram,
    world.pim,
    world.corwin,
    world.odalys,
    world.nerys,
    world.ione,
    world.rafe,
    world.magnus,
  ]
  await db.insert(competence).values(
    people.flatMap(({ personId }) =>
      COMPETENCE_KINDS.map((kind) => ({
        personId,
        kind,
        number: `N-${personId}`,
        startsAt: YEARS_AGO,
        endsAt: FAR,
        enteredBy: world.ione.personId,
        enteredAt: YEARS_AGO,
      })),
    ),
  )
  await stateHeating(db, world, false, after(MORNING, -86_400))
  return world
}

/** A whole request on the world's segment: every hazard answered. The window runs from the morning for four days. */
export function worldContent(world: PermitWorld, changes: Partial<PermitContent> = {}): PermitContent {
  return fullContent({
    holderId: world.pim.personId,
    deputyIds: [world.corwin.personId],
    crewIds: [world.odalys.personId],
    isolatingPersonId: world.odalys.personId,
    electricianId: world.odalys.personId,
    from: MORNING.toISOString(),
    to: after(MORNING, 96 * 3600).toISOString(),
    hazards: Object.fromEntries(HAZARD_KEYS.map((key) => [key, { applies: true, text: 'as usual' }])),
    ...changes,
  })
}

/** Gives somebody another role at an instant, by the hand of a second person. */
export async function grantAt(
  db: DbOrTx,
  to: TestUser,
  role: 'safety-officer',
  at: Date,
  by: TestUser,
): Promise<TestUser> {
  await db.insert(roleGrant).values({
    personId: to.personId,
    role,
    startsAt: at,
    grantedBy: by.personId,
    grantedAt: at,
    reason: 'for a test',
  })
  return { ...to, roles: [...to.roles, role] }
}

/** Somebody's word on the segment's heating. */
export async function stateHeating(db: DbOrTx, world: PermitWorld, on: boolean, at: Date): Promise<void> {
  await db.insert(heatingStatement).values({
    segmentId: world.segmentId,
    on,
    at,
    how: 'looked at the set',
    personId: world.pim.personId,
    recordedAt: at,
  })
}

let locks = 0

/** Locks every point of a permit, verified by somebody else. */
export async function lockEverything(
  db: DbOrTx,
  number: string,
  at: Date,
  who: { appliedBy: number; verifiedBy: number },
): Promise<void> {
  const permit = await findPermit(db, number)
  if (permit === null) throw new Error(`no permit ${number}`)
  for (const { tag, isolates, required, purpose } of permit.content.points) {
    locks += 1
    const lockNumber = `L-${locks}`
    const [{ insertId: pointId }] = await db.insert(isolationPoint).values({
      permitId: permit.id,
      tag,
      isolates,
      required,
      purpose,
      lockNumber,
      ...who,
      appliedAt: at,
      verifiedAt: at,
    })
    await db.insert(lockInUse).values({ lockNumber, permitId: permit.id, pointId, since: at })
  }
}

/** A result of every test that a permit asks for. */
export async function testEverything(
  db: DbOrTx,
  number: string,
  at: Date,
  by: number,
  passed = true,
): Promise<void> {
  const permit = await findPermit(db, number)
  if (permit === null) throw new Error(`no permit ${number}`)
  await db.insert(permitTest).values(
    permit.content.tests.map(({ kind, place, unit, everyHours }) => ({
      permitId: permit.id,
      kind,
      place,
      unit,
      value: kind === 'oxygen' ? 20.8 : 0,
      passed,
      instrumentSerial: 'T-1',
      testerId: by,
      recordedBy: by,
      takenAt: at,
      recordedAt: at,
      nextDueAt: everyHours === null ? null : after(at, everyHours * 3600),
    })),
  )
}
