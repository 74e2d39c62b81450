/**
 * Every address × every role × reading and posting: who gets in, who is refused, who is sent to sign in. An address
 * without an expectation fails, so nothing can be added unguarded by forgetting it here.
 */
import { beforeAll, describe, expect, test } from 'vitest'
import { ROLES, type Role } from '#app/domain/roles.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { loadBuild, request, signIn } from '#tests/support/app.ts'
import { MORNING } from '#tests/support/clock.ts'
import { cleanDatabase, testDb } from '#tests/support/db.ts'
import {
  createClock,
  createSegment,
  createSite,
  createSource,
  createState,
  createUser,
} from '#tests/support/factories.ts'

const STAFF: readonly Role[] = ['technician', 'engineer', 'safety-officer', 'manager', 'administrator']
const HANDS: readonly Role[] = ['technician', 'engineer']

/** What those let in receive; `who` "anyone" needs no sign-in. Everybody else is refused with 403. */
interface Expectation {
  who: readonly Role[] | 'anyone'
  status: number
  /** Where somebody signed in already is answered differently. */
  signedIn?: number
}
interface Address {
  GET?: Expectation
  POST?: Expectation
  /** Sent instead of the bare pattern. */
  path?: string
}

const ADDRESSES: Record<string, Address> = {
  '/sign-in': {
    GET: { who: 'anyone', status: 200, signedIn: 302 },
    POST: { who: 'anyone', status: 400, signedIn: 302 },
  },
  '/sign-out': { GET: { who: 'anyone', status: 302 }, POST: { who: 'anyone', status: 302 } },
  '/health': { GET: { who: 'anyone', status: 200 } },
  // The address stands in one mail and is random: whoever has it may, and nobody guesses it.
  '/unsubscribe/:token': {
    path: '/unsubscribe/0123456789abcdef0123456789abcdef',
    GET: { who: 'anyone', status: 404 },
    POST: { who: 'anyone', status: 404 },
  },
  '/*': { path: '/no-such-page', GET: { who: 'anyone', status: 404 }, POST: { who: 'anyone', status: 404 } },
  '/': { GET: { who: STAFF, status: 200 } },
  '/segments/:tag': { path: '/segments/SG-X1', GET: { who: STAFF, status: 200 } },
  '/segments/:tag/state': {
    path: '/segments/SG-X1/state',
    GET: { who: HANDS, status: 200 },
    POST: { who: HANDS, status: 400 },
  },
  '/segments/:tag/typed-reading': {
    path: '/segments/SG-X1/typed-reading',
    GET: { who: HANDS, status: 200 },
    POST: { who: HANDS, status: 400 },
  },
  '/segments/:tag/heating': {
    path: '/segments/SG-X1/heating',
    GET: { who: STAFF, status: 200 },
    POST: { who: ['technician', 'engineer', 'safety-officer'], status: 400 },
  },
  '/segments/:tag/isolation-tests/new': {
    path: '/segments/SG-X1/isolation-tests/new',
    GET: { who: HANDS, status: 200 },
    POST: { who: HANDS, status: 400 },
  },
  '/segments/:tag/isolation-tests/:testId': {
    path: '/segments/SG-X1/isolation-tests/999',
    GET: { who: STAFF, status: 404 },
    POST: { who: ['engineer'], status: 400 },
  },
  '/forecasts': { GET: { who: STAFF, status: 200 } },
  '/forecasts/:tag': {
    path: '/forecasts/SG-X1',
    GET: { who: STAFF, status: 200 },
    POST: { who: ['engineer'], status: 400 },
  },
  '/segments/:tag/readings.csv': { path: '/segments/SG-X1/readings.csv', GET: { who: STAFF, status: 200 } },
  '/forecasts/:tag/what-if': { path: '/forecasts/SG-X1/what-if', GET: { who: STAFF, status: 200 } },
  '/intake': { GET: { who: STAFF, status: 200 }, POST: { who: HANDS, status: 400 } },
  '/intake/upload': { POST: { who: HANDS, status: 400 } },
  // Without the protocol's header nothing is begun.
  '/intake/uploads': { POST: { who: HANDS, status: 412 } },
  '/intake/uploads/:token': {
    path: '/intake/uploads/none',
    GET: { who: HANDS, status: 404 },
    POST: { who: HANDS, status: 404 },
  },
  '/intake/:importId': {
    path: '/intake/999',
    GET: { who: STAFF, status: 404 },
    POST: { who: HANDS, status: 400 },
  },
  '/intake/:importId/withdrawal': {
    path: '/intake/999/withdrawal',
    GET: { who: STAFF, status: 404 },
    POST: { who: ['technician', 'engineer', 'administrator'], status: 400 },
  },
  '/intake/:importId/original': { path: '/intake/999/original', GET: { who: STAFF, status: 404 } },
  '/intake/:importId/rejected.csv': { path: '/intake/999/rejected.csv', GET: { who: STAFF, status: 404 } },
  '/bakes': { GET: { who: STAFF, status: 200 } },
  '/bakes/options': { path: '/bakes/options?segments=SG-X1', GET: { who: STAFF, status: 200 } },
  '/bakes/plans/new': {
    GET: { who: ['engineer'], status: 200 },
    POST: { who: ['engineer'], status: 400 },
  },
  '/bakes/plans/:planId': {
    path: '/bakes/plans/999',
    GET: { who: STAFF, status: 404 },
    POST: { who: STAFF, status: 400 },
  },
  '/bakes/runs/:tag': {
    path: '/bakes/runs/SG-99',
    GET: { who: STAFF, status: 404 },
    POST: { who: ['technician', 'engineer'], status: 400 },
  },
  '/bakes/schedule': { GET: { who: STAFF, status: 200 }, POST: { who: ['engineer'], status: 400 } },
  '/bakes/schedule/:scheduleId/schedule.csv': {
    path: '/bakes/schedule/999/schedule.csv',
    GET: { who: STAFF, status: 404 },
  },
  '/bakes/schedule/:scheduleId/schedule.ics': {
    path: '/bakes/schedule/999/schedule.ics',
    GET: { who: STAFF, status: 404 },
  },
  '/bakes/plans/:planId/plan.csv': { path: '/bakes/plans/999/plan.csv', GET: { who: STAFF, status: 404 } },
  '/bakes/plans/:planId/plan.ics': { path: '/bakes/plans/999/plan.ics', GET: { who: STAFF, status: 404 } },
  '/permits': { GET: { who: STAFF, status: 200 } },
  '/permits/new': { GET: { who: HANDS, status: 200 }, POST: { who: HANDS, status: 400 } },
  '/permits/thresholds': {
    GET: { who: STAFF, status: 200 },
    POST: { who: ['safety-officer'], status: 400 },
  },
  '/permits/:number': {
    path: '/permits/HSP-2026-999',
    // Whoever may stop work sees the stop card of a permit.
    GET: { who: ROLES, status: 404 },
    POST: { who: ROLES, status: 400 },
  },
  '/permits/:number/edit': {
    path: '/permits/HSP-2026-999/edit',
    GET: { who: HANDS, status: 404 },
    POST: { who: HANDS, status: 400 },
  },
  '/permits/:number/print': { path: '/permits/HSP-2026-999/print', GET: { who: STAFF, status: 404 } },
  '/permits/:number/permit.pdf': {
    path: '/permits/HSP-2026-999/permit.pdf',
    GET: { who: STAFF, status: 404 },
  },
  '/p/:code': { path: '/p/NOSUCH', GET: { who: STAFF, status: 404 } },
  '/permits/:number/history': {
    path: '/permits/HSP-2026-999/history',
    GET: { who: STAFF, status: 404 },
  },
  '/permits/works': { GET: { who: STAFF, status: 200 } },
  '/permits/works/new': {
    GET: { who: ['technician', 'engineer', 'safety-officer'], status: 200 },
    POST: { who: ['technician', 'engineer', 'safety-officer'], status: 400 },
  },
  '/permits/works/:workId': {
    path: '/permits/works/999',
    GET: { who: STAFF, status: 404 },
    POST: { who: ['technician', 'engineer', 'safety-officer'], status: 400 },
  },
  '/permits/bays': {
    GET: { who: STAFF, status: 200 },
    POST: { who: ['technician', 'engineer', 'safety-officer'], status: 400 },
  },
  '/permits/dangers': {
    GET: { who: STAFF, status: 200 },
    POST: { who: ['safety-officer'], status: 400 },
  },
  '/permits/policy': { GET: { who: STAFF, status: 200 }, POST: { who: STAFF, status: 400 } },
  '/permits/policy/runs/:runId/manifest.json': {
    path: '/permits/policy/runs/999/manifest.json',
    GET: { who: STAFF, status: 404 },
  },
  '/permits/:number/heating': {
    path: '/permits/HSP-2026-999/heating',
    GET: { who: STAFF, status: 404 },
    POST: { who: ['technician', 'engineer', 'safety-officer'], status: 400 },
  },
  '/permits/:number/site': {
    path: '/permits/HSP-1999-001/site',
    GET: { who: STAFF, status: 404 },
    POST: { who: STAFF, status: 400 },
  },
  '/permits/:number/site/locks': {
    path: '/permits/HSP-1999-001/site/locks',
    GET: { who: STAFF, status: 404 },
    POST: { who: STAFF, status: 400 },
  },
  '/permits/:number/site/tests': {
    path: '/permits/HSP-1999-001/site/tests',
    GET: { who: STAFF, status: 404 },
    POST: { who: ['technician', 'engineer', 'safety-officer'], status: 400 },
  },
  '/permits/:number/site/rounds': {
    path: '/permits/HSP-1999-001/site/rounds',
    GET: { who: STAFF, status: 404 },
    POST: { who: ['technician', 'engineer', 'safety-officer'], status: 400 },
  },
  '/permits/:number/photos/:photoId': {
    path: '/permits/HSP-1999-001/photos/1',
    GET: { who: STAFF, status: 404 },
  },
  '/logbook': { GET: { who: ROLES, status: 200 } },
  '/logbook/new': { GET: { who: ROLES, status: 200 }, POST: { who: ROLES, status: 400 } },
  '/logbook/:entryId': {
    path: '/logbook/999',
    GET: { who: ROLES, status: 404 },
    POST: { who: ROLES, status: 400 },
  },
  '/register': { GET: { who: STAFF, status: 200 } },
  '/register/:kind': { path: '/register/segments', GET: { who: STAFF, status: 200 } },
  '/register/:kind/new': {
    path: '/register/pumps/new',
    GET: { who: ['engineer', 'administrator'], status: 200 },
    POST: { who: ['engineer', 'administrator'], status: 400 },
  },
  '/register/:kind/:key': {
    path: '/register/segments/SG-X1',
    GET: { who: STAFF, status: 200 },
    POST: { who: ['engineer', 'administrator'], status: 400 },
  },
  '/people': { GET: { who: ['administrator'], status: 200 } },
  '/people/new': {
    GET: { who: ['administrator'], status: 200 },
    POST: { who: ['administrator'], status: 400 },
  },
  '/people/waiting': {
    GET: { who: ['safety-officer', 'manager', 'administrator'], status: 200 },
    POST: { who: ['safety-officer', 'manager', 'administrator'], status: 400 },
  },
  '/people/record': { GET: { who: ['administrator'], status: 200 } },
  '/people/tokens': {
    GET: { who: ['administrator'], status: 200 },
    POST: { who: ['administrator'], status: 400 },
  },
  '/people/competences': { GET: { who: STAFF, status: 200 } },
  '/people/:personId': {
    path: '/people/999',
    // An officer sees what the person may do, and nothing of the account.
    GET: { who: ['safety-officer', 'administrator'], status: 404 },
    POST: { who: ['administrator'], status: 400 },
  },
  '/api/v1/openapi.json': { GET: { who: 'anyone', status: 200 } },
  // A token of its own decides here; being signed in counts for nothing.
  '/api/v1/sources/:code/readings': {
    path: '/api/v1/sources/NL-X/readings',
    GET: { who: 'anyone', status: 405 },
    POST: { who: 'anyone', status: 401 },
  },
  '/api/v1/sources/:code/files/:name': {
    path: '/api/v1/sources/NL-X/files/night.csv',
    GET: { who: 'anyone', status: 405 },
    POST: { who: 'anyone', status: 405 },
  },
  '/api/v1/bounces': { GET: { who: 'anyone', status: 405 }, POST: { who: 'anyone', status: 401 } },
  '/account': { GET: { who: ROLES, status: 200 }, POST: { who: ROLES, status: 400 } },
  '/clock': { GET: { who: ['administrator'], status: 200 }, POST: { who: ['administrator'], status: 400 } },
}

interface Found {
  pattern: string
  reads: boolean
  posts: boolean
}

/** Addresses of the built application, with what each one answers to. */
async function findAddresses(): Promise<Found[]> {
  const { routes } = await loadBuild()
  const pathOf = (id: string | undefined): string => {
    const entry = id === undefined ? undefined : routes[id]
    if (entry === undefined) return ''
    const own = entry.path === undefined || entry.path === '' ? '' : `/${entry.path}`
    return `${pathOf(entry.parentId)}${own}`
  }
  return Object.values(routes)
    .filter((entry) => entry !== undefined && ((entry.path ?? '') !== '' || entry.index === true))
    .filter((entry) => entry?.id !== 'root')
    .map((entry) => ({
      pattern: pathOf(entry?.id) || '/',
      reads: entry?.module.loader !== undefined || entry?.module.default !== undefined,
      posts: entry?.module.action !== undefined,
    }))
}

const people = new Map<Role | 'nobody', number>()

/** A session of its own for each request: one of the addresses signs out. */
async function cookieOf(who: Role | 'nobody'): Promise<string> {
  return signIn(people.get(who) ?? 0)
}

beforeAll(async () => {
  await cleanDatabase()
  const db = testDb()
  await createSite(db)
  await createClock(db, { baseAt: MORNING, baseMachineAt: machineNow() })
  const setter = await createUser(db, { roles: ['engineer'] })
  const segment = await createSegment(db, { tag: 'SG-X1' })
  await createState(db, { segmentId: segment.id, setBy: setter.personId, state: 'in-service' })
  await createSource(db, { code: 'NL-X' })
  for (const role of ROLES) {
    const user = await createUser(db, { roles: [role] })
    people.set(role, user.personId)
  }
  const idle = await createUser(db, { roles: [] })
  people.set('nobody', idle.personId)
})

test('every address of the application has an expectation, and every expectation an address', async () => {
  const found = await findAddresses()
  const missing = found.flatMap(({ pattern, reads, posts }) => [
    ...(reads && ADDRESSES[pattern]?.GET === undefined ? [`GET ${pattern}`] : []),
    ...(posts && ADDRESSES[pattern]?.POST === undefined ? [`POST ${pattern}`] : []),
  ])
  expect(missing).toEqual([])
  const patterns = new Set(found.map(({ pattern }) => pattern))
  expect(Object.keys(ADDRESSES).filter((pattern) => !patterns.has(pattern))).toEqual([])
})

const CASES = Object.entries(ADDRESSES).flatMap(([pattern, address]) =>
  (['GET', 'POST'] as const).flatMap((method) => {
    const expectation = address[method]
    return expectation === undefined
      ? []
      : [{ method, pattern, path: address.path ?? pattern, ...expectation }]
  }),
)

describe.each(CASES)('$method $pattern', ({ method, path, who, status, signedIn = status }) => {
  const send = (cookie?: string) =>
    request(path, {
      method,
      ...(cookie === undefined ? {} : { cookie }),
      ...(method === 'POST' ? { form: {} } : {}),
    })

  test.each([...ROLES])('%s', async (role) => {
    const response = await send(await cookieOf(role))
    expect(response.status).toBe(who === 'anyone' || who.includes(role) ? signedIn : 403)
    await response.body?.cancel()
  })

  test('somebody without any role in force', async () => {
    const own = path === '/account'
    const response = await send(await cookieOf('nobody'))
    expect(response.status).toBe(who === 'anyone' || own ? signedIn : 403)
    await response.body?.cancel()
  })

  test('nobody signed in', async () => {
    const response = await send()
    if (who === 'anyone') {
      expect(response.status).toBe(status)
    } else {
      expect(response.status).toBe(302)
      expect(response.headers.get('Location')).toMatch(/^\/sign-in/)
    }
    await response.body?.cancel()
  })
})
