/** A form that was refused comes back with what was typed in it, as HTML: so no script is needed to keep it. */
import { beforeAll, describe, expect, test } from 'vitest'
import type { Role } from '#app/domain/roles.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { writeEntry } from '#app/services/logbook.server.ts'
import { request, signIn } from '#tests/support/app.ts'
import { MORNING } from '#tests/support/clock.ts'
import { cleanDatabase, testDb } from '#tests/support/db.ts'
import {
  createClock,
  createSegment,
  createSite,
  createSource,
  createState,
  createUser,
  PASSWORD,
} from '#tests/support/factories.ts'

const TYPED = 'pumpcart two left at the west door'
const SECRET = 'not my password at all'

const people = new Map<Role, number>()
let entryId = 0

beforeAll(async () => {
  await cleanDatabase()
  const db = testDb()
  await createSite(db)
  await createClock(db, { baseAt: MORNING, baseMachineAt: machineNow() })
  for (const role of ['technician', 'engineer', 'administrator'] as const)
    people.set(role, (await createUser(db, { roles: [role] })).personId)
  const setter = await createUser(db, { roles: ['engineer'] })
  const segment = await createSegment(db, { tag: 'SG-X1' })
  await createState(db, { segmentId: segment.id, setBy: setter.personId, state: 'in-service' })
  await createSource(db, { code: 'NL-X' })
  const writer = { ...setter, personId: people.get('technician') ?? 0, roles: ['technician'] as const }
  entryId = await writeEntry(db, writer, MORNING, {
    segment: 'SG-X1',
    kind: 'note',
    eventAt: MORNING,
    text: 'Began the round.',
    onChart: false,
    password: PASSWORD,
  })
})

async function post(role: Role, path: string, form: Record<string, string>) {
  const cookie = await signIn(people.get(role) ?? 0)
  const response = await request(path, { cookie, form })
  return { status: response.status, html: await response.text() }
}

/** The start tag of the field of that name; with a value, of the choice that has it. */
function tagOf(html: string, name: string, value?: string): string {
  const tags = html.match(/<(?:input|textarea|select)\b[^>]*>/g) ?? []
  const found = tags.filter((tag) => tag.includes(` name="${name}"`))
  return found.find((tag) => value === undefined || tag.includes(` value="${value}"`)) ?? ''
}

/** The value that a select starts with. */
function chosenIn(html: string, name: string): string | undefined {
  const select = html.match(new RegExp(`<select[^>]* name="${name}"[^>]*>(.*?)</select>`, 's'))?.[1] ?? ''
  return select.match(/<option(?=[^>]* selected="")[^>]* value="([^"]*)"/)?.[1]
}

describe('the logbook', () => {
  test('a new entry: place, kind, time that cannot be read, mark and text come back, the password does not', async () => {
    const { status, html } = await post('technician', '/logbook/new', {
      segment: 'SG-X1',
      kind: 'pump',
      eventAt: 'yesterday at ten',
      text: TYPED,
      onChart: 'on',
      password: SECRET,
    })
    expect(status).toBe(400)
    expect(chosenIn(html, 'segment')).toBe('SG-X1')
    expect(chosenIn(html, 'kind')).toBe('pump')
    expect(tagOf(html, 'eventAt')).toContain('value="yesterday at ten"')
    expect(tagOf(html, 'onChart')).toContain('checked=""')
    expect(html).toContain(`>${TYPED}</textarea>`)
    expect(html).not.toContain(SECRET)
  })

  test('a mark that was taken off stays off', async () => {
    const { html } = await post('technician', '/logbook/new', { segment: '', kind: 'pump', text: TYPED })
    expect(tagOf(html, 'onChart')).not.toBe('')
    expect(tagOf(html, 'onChart')).not.toContain('checked')
  })

  test('a wrong password keeps the text as well', async () => {
    const { status, html } = await post('technician', '/logbook/new', {
      segment: 'SG-X1',
      kind: 'note',
      eventAt: '2026-11-09 07:00',
      text: TYPED,
      password: SECRET,
    })
    expect(status).toBe(422)
    expect(html).toContain(`>${TYPED}</textarea>`)
    expect(tagOf(html, 'eventAt')).toContain('value="2026-11-09 07:00"')
    expect(html).not.toContain(SECRET)
  })

  test('an amendment: text and reason', async () => {
    const { status, html } = await post('technician', `/logbook/${entryId}`, {
      text: TYPED,
      reason: 'the wrong door',
      password: '',
    })
    expect(status).toBe(400)
    expect(html).toContain(`>${TYPED}</textarea>`)
    expect(tagOf(html, 'reason')).toContain('value="the wrong door"')
  })
})

describe('a segment', () => {
  test('its state: choice, confirmation, since and reason', async () => {
    const { status, html } = await post('technician', '/segments/SG-X1/state', {
      from: 'in-service',
      state: 'heating',
      unusual: 'on',
      since: 'this morning',
      reason: TYPED,
    })
    expect(status).toBe(400)
    expect(tagOf(html, 'state', 'heating')).toContain('checked=""')
    expect(tagOf(html, 'state', 'cooling')).not.toContain('checked')
    expect(tagOf(html, 'unusual')).toContain('checked=""')
    expect(tagOf(html, 'since')).toContain('value="this morning"')
    expect(html).toContain(`>${TYPED}</textarea>`)
  })
})

describe('the register', () => {
  test('a new thing: tag, number and a date that cannot be read', async () => {
    const { status, html } = await post('engineer', '/register/pumps/new', {
      tag: 'TMP-X9',
      validFrom: 'last week',
      reason: TYPED,
    })
    expect(status).toBe(400)
    expect(tagOf(html, 'tag')).toContain('value="TMP-X9"')
    expect(tagOf(html, 'validFrom')).toContain('value="last week"')
    expect(html).toContain(`>${TYPED}</textarea>`)
  })
})

describe('people', () => {
  test('a new account: everything but the first password', async () => {
    const { status, html } = await post('administrator', '/people/new', {
      name: 'Ola Nordmark',
      email: 'ola@example.test',
      password: SECRET,
      role: 'engineer',
      until: 'soon',
      reason: TYPED,
    })
    expect(status).toBe(400)
    expect(tagOf(html, 'name')).toContain('value="Ola Nordmark"')
    expect(tagOf(html, 'until')).toContain('value="soon"')
    expect(chosenIn(html, 'role')).toBe('engineer')
    expect(html).toContain(`>${TYPED}</textarea>`)
    expect(html).not.toContain(SECRET)
  })

  test('a role: from when and why', async () => {
    const { status, html } = await post('administrator', `/people/${people.get('engineer')}`, {
      intent: 'grant',
      role: 'manager',
      startsAt: 'on Monday',
      reason: TYPED,
    })
    expect(status).toBe(400)
    expect(chosenIn(html, 'role')).toBe('manager')
    expect(tagOf(html, 'startsAt')).toContain('value="on Monday"')
  })
})

describe('the rest', () => {
  test('a night file that did not come: the source stays chosen', async () => {
    const cookie = await signIn(people.get('technician') ?? 0)
    const body = new FormData()
    body.set('source', 'NL-X')
    const response = await request('/intake', { cookie, body })
    expect(response.status).toBe(400)
    expect(chosenIn(await response.text(), 'source')).toBe('NL-X')
  })

  test('the clock: time and reason', async () => {
    const { status, html } = await post('administrator', '/clock', { to: 'tomorrow', reason: TYPED })
    expect(status).toBe(400)
    expect(tagOf(html, 'to')).toContain('value="tomorrow"')
    expect(tagOf(html, 'reason')).toContain(`value="${TYPED}"`)
  })

  test('signing in: the address, never the password', async () => {
    const response = await request('/sign-in', { form: { email: 'ola@example.test', password: SECRET } })
    expect(response.status).toBe(401)
    const html = await response.text()
    expect(tagOf(html, 'email')).toContain('value="ola@example.test"')
    expect(html).not.toContain(SECRET)
  })
})
