/**
 * Permits and people for scenes in a browser. What lies before a scene is done through the services, by the demo's own
 * people and with their own passwords, so that it stands as it would had they used the pages.
 */
import type { Browser, BrowserContextOptions } from 'playwright-core'
import { openSession } from '#app/auth/session.server.ts'
import { connect, type Db } from '#app/db/client.server.ts'
import { listPointRows } from '#app/db/queries/isolation-points.server.ts'
import { findPermit, type PermitRow } from '#app/db/queries/permits.server.ts'
import type { Actor } from '#app/domain/actor.ts'
import type { PermitContent, RequiredTest } from '#app/domain/permit-content.ts'
import type { Role } from '#app/domain/roles.ts'
import type { FormAct } from '#app/domain/schemas/permit-act.ts'
import { readClock } from '#app/services/clock.server.ts'
import { takePointStep } from '#app/services/isolation-point-steps.server.ts'
import { recordPermitTest } from '#app/services/permit-test-steps.server.ts'
import { actOnPermit, createPermit } from '#app/services/permits.server.ts'
import { DEMO_SIGN_INS } from '#seeds/demo-sign-ins.ts'
import { nameOf, PERSON_ID, type PersonKey } from '#seeds/people.ts'
import { contentOf } from '#seeds/permits/content.ts'
import { openPage, type TestPage } from './browser.ts'

const HOUR_MS = 3_600_000

/** The role by which each of the demo's people signs in; whoever is not on the sign-in page shares its password. */
const ROLES_OF = {
  pim: ['technician'],
  odalys: ['technician'],
  corwin: ['technician'],
  nerys: ['technician'],
  bram: ['engineer', 'technician'],
  ione: ['safety-officer'],
  rafe: ['safety-officer'],
  magnus: ['manager'],
  juniper: ['administrator'],
} as const satisfies Partial<Record<PersonKey, readonly Role[]>>
export type ScenePerson = keyof typeof ROLES_OF

/** Another set than the one that the demo's content names, and the spare that goes with it. */
export type SceneSupply = 'HX-1' | 'HX-2' | 'HX-3'

export interface ScenePermit {
  segment: string
  supply: SceneSupply
  from: Date
  hours: number
  holder: ScenePerson
  deputy: ScenePerson
  changes?: Partial<PermitContent>
}

export interface Scenes {
  db: Db
  now(): Promise<Date>
  permit(number: string): Promise<PermitRow>
  /** Bram draws up a bake of one segment, complete. @returns its number */
  draft(terms: ScenePermit): Promise<string>
  act(
    by: ScenePerson,
    number: string,
    act: FormAct,
    more?: { reason?: string; detail?: object },
  ): Promise<void>
  /** Applies and verifies locks. @param locks in the order of the points; null leaves one out */
  lock(
    number: string,
    locks: readonly (string | null)[],
    by: { applies: ScenePerson; verifies: ScenePerson },
  ): Promise<void>
  /** Takes a lock away, by its owner. */
  unlock(number: string, lock: string): Promise<void>
  /** Writes a good result of each test down but for those kinds. */
  test(number: string, by: ScenePerson, except?: readonly RequiredTest['kind'][]): Promise<void>
  /** A page on which somebody of the demo is signed in. */
  open(browser: Browser, who: ScenePerson, options?: BrowserContextOptions): Promise<TestPage>
  close(): Promise<void>
}

export function passwordOf(who: ScenePerson): string {
  const found = DEMO_SIGN_INS.find(({ role }) => role === ROLES_OF[who][0])
  if (found === undefined) throw new Error(`The demo offers no sign-in for the role of ${who}.`)
  return found.password
}

function actorOf(who: ScenePerson): Actor {
  return { personId: PERSON_ID[who], name: nameOf(PERSON_ID[who]), roles: ROLES_OF[who] }
}

/** @param databaseUrl the demo's; @param baseURL the web server that runs on it */
export function scenesOf(databaseUrl: string, baseURL: string): Scenes {
  process.env.DATABASE_URL = databaseUrl
  process.env.SESSION_SECRET ??= 'a secret for tests only, 32 or more'
  process.env.LOG_LEVEL ??= 'silent'
  const { db, pool } = connect(databaseUrl, { connectionLimit: 3 })

  const now = async () => (await readClock(db)).now

  async function permit(number: string): Promise<PermitRow> {
    const found = await findPermit(db, number)
    if (found === null) throw new Error(`There is no permit ${number}.`)
    return found
  }

  return {
    db,
    now,
    permit,
    draft: async (terms) => createPermit(db, actorOf('bram'), await now(), { content: sceneContent(terms) }),
    async act(by, number, act, { reason = '', detail = {} } = {}) {
      const { revision } = await permit(number)
      const form = { act, revision, reason, password: passwordOf(by), detail }
      await actOnPermit(db, actorOf(by), await now(), number, form)
    },
    async lock(number, locks, { applies, verifies }) {
      for (const [index, lockNumber] of locks.entries()) {
        if (lockNumber === null) continue
        const { content } = await permit(number)
        const tag = content.points[index]?.tag
        if (tag === undefined) throw new Error(`${number} has no point for ${lockNumber}.`)
        await takePointStep(db, actorOf(applies), await now(), number, {
          act: 'apply',
          tag,
          lockNumber,
          tagNumber: '',
          by: null,
          note: '',
          password: passwordOf(applies),
        })
        const hung = await listPointRows(db, (await permit(number)).id)
        const point = hung.find((one) => one.lockNumber === lockNumber)
        if (point === undefined) throw new Error(`${lockNumber} does not hang.`)
        await takePointStep(db, actorOf(verifies), await now(), number, {
          act: 'verify',
          pointId: point.id,
          revision: point.revision,
          releasedHow: 'Nothing stored behind it',
          zeroEnergy: 'Tried by hand: does not move',
          by: null,
          password: passwordOf(verifies),
        })
      }
    },
    async unlock(number, lock) {
      const hung = await listPointRows(db, (await permit(number)).id)
      const point = hung.find(({ lockNumber, removedAt }) => lockNumber === lock && removedAt === null)
      const owner = (Object.keys(ROLES_OF) as ScenePerson[]).find(
        (who) => PERSON_ID[who] === point?.appliedBy,
      )
      if (point === undefined || owner === undefined) {
        throw new Error(
          `${lock} does not hang for ${number}, or is the lock of somebody who does not sign in.`,
        )
      }
      await takePointStep(db, actorOf(owner), await now(), number, {
        act: 'remove',
        pointId: point.id,
        revision: point.revision,
        by: null,
        note: '',
        password: passwordOf(owner),
      })
    },
    async test(number, by, except = []) {
      const { content } = await permit(number)
      for (const required of content.tests) {
        if (except.includes(required.kind)) continue
        const { low, high } = required
        const at = await now()
        await recordPermitTest(db, actorOf(by), at, number, {
          kind: required.kind,
          place: required.place,
          value:
            low === null && high === null
              ? undefined
              : low !== null && high !== null
                ? (low + high) / 2
                : (low ?? 0),
          says: low === null && high === null ? true : null,
          instrument: 'TM-77',
          calibrationDue: new Date(at.getTime() + 90 * 24 * HOUR_MS),
          segment: content.segments[0] ?? '',
          takenAt: at,
          by: null,
          note: '',
        })
      }
    },
    async open(browser, who, options = {}) {
      const view = await openPage(browser, baseURL, options)
      // A server that is busy with other work still answers within this.
      view.page.setDefaultTimeout(45_000)
      const cookie = (await openSession(db, PERSON_ID[who], { userAgent: 'scene' })).split(';')[0] ?? ''
      const [name = '', ...value] = cookie.split('=')
      await view.context.addCookies([{ name, value: value.join('='), url: baseURL }])
      return view
    },
    close: () => pool.promise().end(),
  }
}

/** What a bake of the demo says, for another segment, set and time. */
function sceneContent({
  segment,
  supply,
  from,
  hours,
  holder,
  deputy,
  changes = {},
}: ScenePermit): PermitContent {
  const told = contentOf(
    {
      number: 'HSP-2026-900',
      segments: [segment],
      work: 'Bake at 150 °C',
      state: 'draft',
      requestedBy: 'bram',
      holder,
      deputy,
      approvedBy: null,
      window: { fromAt: from, untilAt: new Date(from.getTime() + hours * HOUR_MS) },
      suspensions: [],
    },
    null,
  )
  // A bake that stands in no list of bakes hangs on HX-3, with HX-2 as the spare.
  const spare = supply === 'HX-1' ? 'HX-2' : 'HX-1'
  const text = JSON.stringify(told)
    .replaceAll('HX-2', 'spare')
    .replaceAll('HX-3', supply)
    .replaceAll('spare', spare)
  return { ...(JSON.parse(text) as PermitContent), ...changes }
}
