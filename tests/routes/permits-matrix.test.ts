/**
 * Every state of a permit × every role × its pages and each act, with the answers written down by hand. Acts are sent
 * empty and unsigned, so that what is allowed stops at what it asks for: 403 says that it takes somebody else, 422
 * that the state or a condition is against it or that it wants a signature, 400 that the form says too little. The
 * right people try every act; of the others one takes its turn, and in a soak (tests/soak/permits-every-role.ts) all do.
 */
import { beforeAll, describe, expect, test } from 'vitest'
import { permit, permitAct, permitSegment, permitVersion } from '#app/db/schema/index.ts'
import { PERMIT_STATES, type PermitState } from '#app/domain/permit-words.ts'
import { ROLES, type Role } from '#app/domain/roles.ts'
import type { FormAct } from '#app/domain/schemas/permit-act.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { request, signIn } from '#tests/support/app.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { cleanDatabase, testDb } from '#tests/support/db.ts'
import { createClock, createSegment, createSite, createState, createUser } from '#tests/support/factories.ts'
import { fullContent } from '#tests/support/permit-content.ts'

const HOUR = 3600
/** The permit's holder is the technician, its author the engineer; another officer than the one asked has approved it. */
type Who = Role | 'nobody'

/** Which roles are the right people for an act, by their first letters; everybody else receives 403. */
const LETTERS: Record<string, Role> = {
  t: 'technician',
  e: 'engineer',
  s: 'safety-officer',
  m: 'manager',
  a: 'administrator',
  c: 'contributor',
}

interface ActRow {
  /** The right people. */
  who: string
  /** From these states it can be done; from others the right people receive 422. */
  from: string
  /** What the right people receive for an empty form, unsigned. */
  empty: 400 | 422 | 302
  /** States in which nobody is the right person, because the permit has no holder yet. */
  nobodyIn?: string
  /** Sent along, because without it the form is refused before it is asked who sends it. */
  form?: Record<string, string>
}

const ACTS: Record<FormAct, ActRow> = {
  request: { who: 'te', from: 'draft returned', empty: 422 },
  return: { who: 's', from: 'requested', empty: 400 },
  refuse: { who: 's', from: 'requested', empty: 400 },
  // The tiny register of this test adopts no threshold.
  approve: { who: 's', from: 'requested', empty: 422 },
  withdraw: { who: 'tes', from: 'requested returned approved', empty: 400 },
  'site-check': { who: 'tes', from: 'approved issued suspended', empty: 400 },
  // No lock hangs and no test has been taken.
  accept: { who: 't', from: 'approved', empty: 422 },
  'hand-over': { who: 't', from: 'issued suspended', empty: 400 },
  revalidate: { who: 't', from: 'issued', empty: 422 },
  extend: { who: 's', from: 'issued', empty: 422 },
  suspend: { who: 'tesmac', from: 'issued', empty: 400 },
  'made-safe': { who: 'tes', from: 'suspended expired', empty: 400, form: { at: '2026-11-09 07:30' } },
  resume: { who: 's', from: 'suspended', empty: 422 },
  'hand-back': {
    who: 't',
    from: 'issued suspended expired',
    empty: 400,
    nobodyIn: 'draft requested returned refused approved lapsed withdrawn discarded',
  },
  'return-to-holder': { who: 's', from: 'handed-back', empty: 400 },
  cancel: { who: 's', from: 'handed-back', empty: 400 },
  // Last, because it asks for nothing: it is done.
  discard: { who: 'te', from: 'draft', empty: 302 },
}

const STAFF = 'tesma'
/** Who sees a page; everybody else receives 403. */
const PAGES: Record<string, string> = {
  // A contributor sees the stop card and nothing else of it.
  '': `${STAFF}c`,
  '/history': STAFF,
  // Closed to changes in most states, and then says so.
  '/edit': 'te',
  '/heating': STAFF,
  '/site': STAFF,
  '/site/locks': STAFF,
  '/site/tests': STAFF,
  '/site/rounds': STAFF,
  // Whatever its state: what is no live permit is printed as such.
  '/print': STAFF,
  '/permit.pdf': STAFF,
}

const EVERYBODY: readonly Who[] = [...ROLES, 'nobody']
const LIVE: readonly PermitState[] = ['issued', 'suspended', 'expired', 'handed-back', 'cancelled']
const APPROVED: readonly PermitState[] = ['approved', 'lapsed', ...LIVE]
const REVISION = 7

const cookies = new Map<Who, string>()
const people = new Map<Who | 'other-officer', number>()
let segmentId = 0

function has(letters: string, who: Who): boolean {
  return [...letters].some((letter) => LETTERS[letter] === who)
}

function person(who: Who | 'other-officer'): number {
  const id = people.get(who)
  if (id === undefined) throw new Error(`nobody was made for ${who}`)
  return id
}

function numberOf(state: PermitState): string {
  return `HSP-2026-${String(PERMIT_STATES.indexOf(state) + 1).padStart(3, '0')}`
}

/** A permit in a state, written straight into the tables: as if it had come there in the last two days. */
async function insertPermitIn(state: PermitState): Promise<void> {
  const db = testDb()
  const content = fullContent({
    segments: ['SG-T1'],
    holderId: person('technician'),
    deputyIds: [],
    crewIds: [],
    isolatingPersonId: person('technician'),
    electricianId: person('technician'),
    from: after(MORNING, -HOUR).toISOString(),
    to: after(MORNING, 90 * HOUR).toISOString(),
  })
  const approved = APPROVED.includes(state)
  const live = LIVE.includes(state)
  const [{ insertId: permitId }] = await db.insert(permit).values({
    number: numberOf(state),
    shortCode: `T${PERMIT_STATES.indexOf(state)}`,
    state,
    revision: REVISION,
    version: 1,
    approvedVersion: approved ? 1 : null,
    createdBy: person('engineer'),
    createdAt: after(MORNING, -48 * HOUR),
    requestedBy: state === 'draft' || state === 'discarded' ? null : person('engineer'),
    requestedAt: after(MORNING, -40 * HOUR),
    approvedBy: approved ? person('other-officer') : null,
    approvedAt: approved ? after(MORNING, -30 * HOUR) : null,
    holderId: live ? person('technician') : null,
    windowFrom: after(MORNING, -HOUR),
    windowTo: after(MORNING, 90 * HOUR),
    currentUntil: live ? after(MORNING, 6 * HOUR) : null,
  })
  await db.insert(permitSegment).values({ permitId, segmentId })
  await db.insert(permitVersion).values({
    permitId,
    version: 1,
    content,
    madeBy: person('engineer'),
    madeAt: after(MORNING, -48 * HOUR),
  })
  const act = (name: typeof permitAct.$inferInsert.act, revision: number, toState: PermitState) => ({
    permitId,
    act: name,
    fromState: toState,
    toState,
    revision,
    version: 1,
    at: after(MORNING, -HOUR),
    recordedAt: after(MORNING, -HOUR),
    personId: person('technician'),
  })
  const steps = live ? [act('draft', 1, 'draft'), act('accept', 2, 'issued')] : [act('draft', 1, 'draft')]
  await db.insert(permitAct).values([...steps, act('edit', REVISION, state)])
}

beforeAll(async () => {
  await cleanDatabase()
  const db = testDb()
  await createSite(db)
  await createClock(db, { baseAt: MORNING, baseMachineAt: machineNow() })
  for (const who of EVERYBODY) {
    const user = await createUser(db, { roles: who === 'nobody' ? [] : [who] })
    people.set(who, user.personId)
    cookies.set(who, await signIn(user.personId))
  }
  people.set('other-officer', (await createUser(db, { roles: ['safety-officer'] })).personId)
  const made = await createSegment(db, { tag: 'SG-T1' })
  segmentId = made.id
  await createState(db, { segmentId, setBy: person('engineer'), state: 'in-service' })
  for (const state of PERMIT_STATES) await insertPermitIn(state)
})

async function statusOf(who: Who, path: string, form?: Record<string, string>): Promise<number> {
  const cookie = cookies.get(who)
  const response = await request(path, {
    ...(cookie === undefined ? {} : { cookie }),
    ...(form === undefined ? {} : { form }),
  })
  await response.body?.cancel()
  return response.status
}

function expectedOf(row: ActRow, state: PermitState, who: Who): number {
  const among = (states: string) => states.split(' ').includes(state)
  if (!has(row.who, who)) return 403
  if (row.nobodyIn !== undefined && among(row.nobodyIn)) return 403
  return among(row.from) ? row.empty : 422
}

/** One of a list, another at each turn; all of it in a soak, where EVERY_ROLE is 1. */
function inTurn<Each>(list: readonly Each[], turn: number): Each[] {
  if (process.env.EVERY_ROLE === '1') return [...list]
  return list.length === 0 ? [] : list.slice(turn % list.length, (turn % list.length) + 1)
}

describe.each([...PERMIT_STATES])('a permit that is %s', (state) => {
  const turn = PERMIT_STATES.indexOf(state)

  test.each(Object.entries(PAGES))('shows %s to whom it may', async (page, who) => {
    const seeing = EVERYBODY.filter((each) => has(who, each))
    const others = EVERYBODY.filter((each) => !has(who, each))
    for (const each of [...inTurn(seeing, turn), ...inTurn(others, turn)]) {
      const status = await statusOf(each, `/permits/${numberOf(state)}${page}`)
      expect(`${each}: ${status}`).toBe(`${each}: ${has(who, each) ? 200 : 403}`)
    }
  })

  test.each(Object.entries(ACTS))('%s', async (act, row) => {
    const right = EVERYBODY.filter((each) => has(row.who, each))
    const wrong = EVERYBODY.filter((each) => !has(row.who, each))
    // The right people last: an act that succeeds changes the state for whoever comes after.
    let done = false
    for (const who of [...inTurn(wrong, turn + Object.keys(ACTS).indexOf(act)), ...right]) {
      // Without its page: the answer to the act alone.
      const path = `/permits/${numberOf(state)}.data`
      const status = await statusOf(who, path, { ...row.form, act, revision: String(REVISION) })
      const expected = expectedOf(row, state, who)
      if (expected === 302) {
        // A redirect in data is answered with 202; whoever presses after that has an old page before them.
        expect(`${who}: ${status}`).toBe(`${who}: ${done ? 409 : 202}`)
        done = true
      } else {
        expect(`${who}: ${status}`).toBe(`${who}: ${expected}`)
      }
    }
  })
})
