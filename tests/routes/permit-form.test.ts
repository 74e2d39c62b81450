/** The permit form through the built application, as a browser without script sends it, and as the page saves by itself. */
import { beforeAll, beforeEach, describe, expect, test } from 'vitest'
import { findPermit } from '#app/db/queries/permits.server.ts'
import { competence, heaterCircuit, permit, supplySet, valve } from '#app/db/schema/index.ts'
import { emptyPermitContent, type PermitContent } from '#app/domain/permit-content.ts'
import { permitFormValues } from '#app/domain/permit-form-values.ts'
import { HAZARD_KEYS } from '#app/domain/permit-words.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { createPermit, savePermit } from '#app/services/permits.server.ts'
import { loadBuild, request, signIn } from '#tests/support/app.ts'
import { MORNING } from '#tests/support/clock.ts'
import { cleanDatabase, testDb } from '#tests/support/db.ts'
import {
  createClock,
  createSegment,
  createSite,
  createUser,
  type TestUser,
} from '#tests/support/factories.ts'
import { fullContent } from '#tests/support/permit-content.ts'

const ZONE = 'Europe/Berlin'
const db = testDb()
let bram: TestUser
let odalys: TestUser
let number: string

const CONTENT: PermitContent = {
  ...emptyPermitContent(),
  title: 'Blanket on the cross',
  segments: ['SG-X2'],
  maxCelsius: 90,
  work: 'Drying\nof the cross',
}

beforeAll(async () => {
  // It takes its time on a busy machine, and the first test should not have to wait for it.
  await loadBuild()
  await cleanDatabase()
  await createSite(db, { timeZone: ZONE })
  await createClock(db, { baseAt: MORNING, baseMachineAt: machineNow() })
  bram = await createUser(db, { roles: ['engineer'], name: 'Bram Holt' })
  odalys = await createUser(db, { roles: ['technician'], name: 'Odalys Fenn' })
  await db.insert(competence).values({
    personId: odalys.personId,
    kind: 'permit-holder',
    number: 'PH-7',
    startsAt: MORNING,
    endsAt: new Date('2026-12-01T00:00:00+01:00'),
    enteredBy: bram.personId,
    enteredAt: MORNING,
  })
  const west = await createSegment(db, { tag: 'SG-X1', startM: 0, endM: 150 })
  const segment = await createSegment(db, { tag: 'SG-X2', lineId: west.lineId, startM: 150, endM: 300 })
  const gate = {
    kind: 'gate' as const,
    lineId: west.lineId,
    seal: 'all metal',
    limitC: 150,
    partRiseShare: 1,
  }
  await db.insert(valve).values([
    {
      ...gate,
      tag: 'GV-X1',
      chainageM: 150,
      segmentId: west.id,
      eastSegmentId: segment.id,
      normalPosition: 'open',
    },
    { ...gate, tag: 'NV-X2', kind: 'vent', chainageM: 200, segmentId: segment.id, normalPosition: 'shut' },
  ])
  await db.insert(heaterCircuit).values({ tag: 'BH-X1', kind: 'blanket', segmentId: west.id, powerW: 6000 })
  await db.insert(supplySet).values({ tag: 'HX-X', maxAmps: 1500, maxVolts: 60, openCircuitVolts: 75 })
})

beforeEach(async () => {
  number = await createPermit(db, bram, MORNING, { content: CONTENT })
})

function onlyOne(name: string, ids: readonly string[]): Record<string, string> {
  if (ids.length > 1) throw new Error(`${name}: this test can send one person, not ${ids.length}`)
  return ids[0] === undefined ? {} : { [name]: ids[0] }
}

/** The fields of the form as a browser sends them, with what a test changes. */
function sent(change: Record<string, string> = {}, content: PermitContent = CONTENT): Record<string, string> {
  const fields: Record<string, string> = { intent: 'save', revision: '1', version: '1' }
  const put = (name: string, value: unknown): void => {
    if (typeof value === 'string') fields[name] = value.replaceAll('\n', '\r\n')
    // A box for each person goes by one name; one of them is as many as a record of fields can hold.
    else if (name === 'deputyIds' || name === 'crewIds')
      Object.assign(fields, onlyOne(name, value as string[]))
    else
      for (const [key, inner] of Object.entries(value as object))
        put(name === '' ? key : `${name}.${key}`, inner)
  }
  put('', permitFormValues(content, ZONE))
  return { ...fields, ...change }
}

/** Without the marks that React puts between pieces of text. */
function plain(html: string): string {
  return html.replaceAll('<!-- -->', '')
}

async function post(
  form: Record<string, string>,
  who: TestUser | null = bram,
  path = `/permits/${number}/edit`,
) {
  const cookie = who === null ? {} : { cookie: await signIn(who.personId) }
  const response = await request(path, { ...cookie, form })
  const html = plain(await response.text())
  return { status: response.status, location: response.headers.get('Location') ?? '', html }
}

async function page(path = `/permits/${number}/edit`, who: TestUser = bram): Promise<string> {
  const response = await request(path, { cookie: await signIn(who.personId) })
  expect(response.status).toBe(200)
  return plain(await response.text())
}

function tagOf(html: string, name: string): string {
  const tags = html.match(/<(?:input|textarea|select)\b[^>]*>/g) ?? []
  return tags.find((tag) => tag.includes(` name="${name}"`)) ?? ''
}

const contentNow = async () => (await findPermit(db, number))?.content

describe('the form', () => {
  test('shows what is saved, without script too, and answers nothing by itself', async () => {
    const html = await page()
    expect(tagOf(html, 'title')).toContain('value="Blanket on the cross"')
    expect(tagOf(html, 'maxCelsius')).toContain('value="90"')
    expect(html).toContain('>Drying\nof the cross</textarea>')
    expect(html).toMatch(/name="hazards\.fire\.applies"/)
    const radios = html.match(/<input[^>]*type="radio"[^>]*>/g) ?? []
    expect(radios.length).toBeGreaterThan(30)
    expect(radios.filter((radio) => radio.includes('checked'))).toEqual([])
    expect(html.match(/<input[^>]*type="checkbox"[^>]*checked/g)).toBeNull()
  })

  test('counts beside each section what it lacks', async () => {
    const html = await page()
    const sections = html.match(/<nav aria-label="Sections of the permit".*?<\/nav>/s)?.[0] ?? ''
    const standing = [...sections.matchAll(/(\d+ missing|complete)</g)].map(([, text]) => text)
    expect(standing).toHaveLength(9)
    expect(standing[0]).toBe('complete')
    expect(standing[5]).toBe('18 missing')
  })

  test('names people with the end of their competence: the last day on which it holds', async () => {
    const html = await page()
    expect(html).toContain('Odalys Fenn · PH-7, until 30 Nov 2026')
    expect(html).toContain('Bram Holt · none entered')
  })

  test('nobody but those who draft may open it', async () => {
    const officer = await createUser(db, { roles: ['safety-officer'] })
    const response = await request(`/permits/${number}/edit`, { cookie: await signIn(officer.personId) })
    expect(response.status).toBe(403)
  })
})

describe('saving', () => {
  test('keeps every field, and says where to go on', async () => {
    const change = {
      maxCelsius: '92,5',
      from: '2026-11-10 06:00',
      to: '2026-11-11 18:00',
      'hazards.fire.applies': 'no',
      'hazards.fire.text': 'No insulation is left on it.',
      'points.0.tag': 'IP-1',
      'points.0.isolates': 'NV-X2, vent valve',
      'points.0.required': 'shut',
      'points.0.purpose': 'to-heat',
      'points.0.boxed': 'yes',
      deputyIds: String(odalys.personId),
    }
    const { status, location } = await post(sent({ ...change, intent: 'check' }))
    expect([status, location]).toEqual([302, `/permits/${number}/edit?check=1`])
    expect(await contentNow()).toEqual({
      ...CONTENT,
      maxCelsius: 92.5,
      from: '2026-11-10T05:00:00.000Z',
      to: '2026-11-11T17:00:00.000Z',
      hazards: { fire: { applies: false, text: 'No insulation is left on it.' } },
      points: [
        { tag: 'IP-1', isolates: 'NV-X2, vent valve', required: 'shut', purpose: 'to-heat', boxed: true },
      ],
      deputyIds: [odalys.personId],
    })
  })

  test('"save and check" lists what is missing, with a way to each field', async () => {
    const html = await page(`/permits/${number}/edit?check=1`)
    expect(html).toContain('still missing for a request')
    const targets = [...html.matchAll(/href="#(field-[^"]+)"/g)].map(([, target]) => target)
    expect(targets.length).toBeGreaterThan(20)
    for (const target of targets) expect(html, target).toContain(` id="${target}"`)
  })

  test('what cannot be read is refused, and everything typed comes back', async () => {
    const typed = {
      title: 'Blanket, second try',
      maxCelsius: 'quite hot',
      from: '2026-10-25 02:30',
      'contacts.0.role': 'Control room',
      'contacts.0.phone': '',
      'hazards.shock.applies': 'yes',
    }
    const { status, html } = await post(sent(typed))
    expect(status).toBe(400)
    expect(html).toContain('3 fields need another look; nothing has been saved.')
    expect(tagOf(html, 'title')).toContain('value="Blanket, second try"')
    expect(tagOf(html, 'maxCelsius')).toContain('value="quite hot"')
    expect(tagOf(html, 'maxCelsius')).toContain('aria-invalid="true"')
    expect(tagOf(html, 'contacts.0.role')).toContain('value="Control room"')
    expect(html).toContain('href="#field-contacts.0.phone"')
    expect(html).toContain('2026-10-25 02:30 +02:00')
    const answers = html.match(/<input[^>]*name="hazards\.shock\.applies"[^>]*>/g) ?? []
    expect(answers.map((one) => one.includes('checked=""'))).toEqual([true, false])
    expect(await contentNow()).toEqual(CONTENT)
  })

  test('buttons add and take out rows without saving, and keep what is half typed', async () => {
    const first = await post(sent({ intent: 'add:points', title: 'Half a title', maxCelsius: 'not yet' }))
    expect(first.status).toBe(200)
    expect(tagOf(first.html, 'points.0.tag')).toContain('value="IP-X2-1"')
    expect(tagOf(first.html, 'maxCelsius')).toContain('value="not yet"')
    const rows = {
      'contacts.0.role': 'Control room',
      'contacts.0.phone': '4400',
      'contacts.1.role': 'Fire brigade',
      'contacts.1.phone': '122',
    }
    const second = await post(sent({ ...rows, intent: 'remove:contacts:0' }))
    expect(tagOf(second.html, 'contacts.0.role')).toContain('value="Fire brigade"')
    expect(tagOf(second.html, 'contacts.1.role')).toBe('')
    expect(await contentNow()).toEqual(CONTENT)
  })

  test('a stale form saves nothing, says who changed what, and puts both together', async () => {
    const theirs = { ...CONTENT, maxCelsius: 80, bays: 'Bay 3', title: 'Blanket' }
    await savePermit(db, odalys, MORNING, number, { revision: 1, content: theirs, reason: '' })
    const { status, html } = await post(sent({ maxCelsius: '85', shifts: 'Crew A' }))
    expect(status).toBe(409)
    expect(html).toContain('Odalys Fenn: saved a version')
    expect(html).toMatch(/Highest temperature: “90 °C” became “80 °C”.*?you changed this too: yours stands/s)
    expect(tagOf(html, 'maxCelsius')).toContain('value="85"')
    expect(tagOf(html, 'shifts')).toContain('value="Crew A"')
    expect(tagOf(html, 'bays')).toContain('value="Bay 3"')
    expect(tagOf(html, 'title')).toContain('value="Blanket"')
    expect(await contentNow()).toEqual(theirs)
    // The form that came back is filled from what stands now: it can be saved.
    expect(tagOf(html, 'revision')).toContain('value="2"')
    const mine = { ...theirs, maxCelsius: 85, shifts: 'Crew A' }
    expect((await post(sent({ revision: '2', version: '2' }, mine))).status).toBe(302)
    expect(await contentNow()).toEqual(mine)
  })

  test('a form that does not say what it was filled from is refused', async () => {
    expect((await post({ intent: 'save' })).status).toBe(400)
  })
})

describe('saving by itself', () => {
  async function saveItself(change: Record<string, string>, who: TestUser | null = bram) {
    const cookie = who === null ? {} : { cookie: await signIn(who.personId) }
    return request(`/permits/${number}/edit.data`, {
      ...cookie,
      form: sent({ ...change, intent: 'autosave' }),
    })
  }

  test('answers with the revision to go on from', async () => {
    const response = await saveItself({ shifts: 'Crew B' })
    expect(response.status).toBe(200)
    expect(await response.text()).toContain('"saved"')
    expect(await contentNow()).toMatchObject({ shifts: 'Crew B' })
    expect((await saveItself({ shifts: 'Crew A' })).status).toBe(409)
  })

  test('what is the same makes no new version', async () => {
    await saveItself({})
    expect(await findPermit(db, number)).toMatchObject({ revision: 1, version: 1 })
  })

  test('a session that has ended is said, and the page is not sent away', async () => {
    const response = await saveItself({ shifts: 'Crew B' }, null)
    expect(response.status).toBe(401)
    expect(await response.text()).toContain('signed-out')
    expect(await contentNow()).toEqual(CONTENT)
  })
})

describe('other states', () => {
  async function put(state: 'requested' | 'approved' | 'issued' | 'discarded'): Promise<void> {
    const approved = state === 'approved' || state === 'issued'
    await db.update(permit).set({
      state,
      approvedVersion: approved ? 1 : null,
      windowFrom: new Date('2026-11-20T05:00:00Z'),
      windowTo: new Date('2026-11-21T05:00:00Z'),
      ...(state === 'issued' ? { currentUntil: new Date('2026-11-20T17:00:00Z') } : {}),
    })
  }

  test.each([
    ['requested', /ask the officer to return it/],
    ['issued', /Suspend it first/],
    ['discarded', /Draw up a new permit/],
  ] as const)('%s: closed, and why', async (state, words) => {
    await put(state)
    const html = await page()
    expect(html).toMatch(words)
    expect(tagOf(html, 'title')).toBe('')
  })

  test('text that was typed comes back even where the permit has been requested meanwhile', async () => {
    await put('requested')
    const { status, html } = await post(sent({ title: 'Typed before that' }))
    expect(status).toBe(400)
    expect(tagOf(html, 'title')).toContain('value="Typed before that"')
  })

  test('approved: says that saving ends the approval, and wants a reason', async () => {
    await put('approved')
    const html = await page()
    expect(html).toContain('Saving any change here ends that approval')
    expect(tagOf(html, 'reason')).not.toBe('')
    const refused = await post(sent({ maxCelsius: '95' }))
    expect(refused.status).toBe(400)
    expect(tagOf(refused.html, 'maxCelsius')).toContain('value="95"')
    expect(await contentNow()).toEqual(CONTENT)
  })

  test('approved: with a reason the change is saved, and the permit waits for an officer again', async () => {
    const hazards = Object.fromEntries(HAZARD_KEYS.map((key) => [key, { applies: true, text: '' }]))
    const from = '2026-11-20T05:00:00.000Z'
    const to = '2026-11-21T05:00:00.000Z'
    const full = fullContent({ segments: ['SG-X2'], from, to, hazards })
    number = await createPermit(db, bram, MORNING, { content: full })
    await put('approved')
    const without = await post(sent({ maxCelsius: '155', reason: '' }, full))
    expect(without.status).toBe(400)
    expect(tagOf(without.html, 'reason')).toContain('aria-invalid="true"')
    const { status, location } = await post(
      sent({ maxCelsius: '155', reason: 'Water needs it hotter' }, full),
    )
    expect([status, location]).toEqual([302, `/permits/${number}`])
    expect(await findPermit(db, number)).toMatchObject({
      state: 'requested',
      version: 2,
      approvedBy: null,
      content: { ...full, maxCelsius: 155 },
    })
  })
})

describe('a new permit', () => {
  test('by hand: the draft proposes points, tests and limits, and names nobody', async () => {
    const form = { from: 'segment', segment: 'SG-X2', second: '', celsius: '90', supply: '' }
    const { status, location } = await post(form, odalys, '/permits/new')
    expect(status).toBe(302)
    const made = /^\/permits\/(HSP-2026-\d{3})\/edit$/.exec(location)?.[1] ?? ''
    const content = (await findPermit(db, made))?.content
    expect(content).toMatchObject({ segments: ['SG-X2'], fromM: 150, toM: 300, maxCelsius: 90, supply: null })
    expect(content?.points.map(({ isolates }) => isolates)).toEqual([
      'NV-X2, vent valve',
      'GV-X1, gate valve',
      'BH-X1, blanket of SG-X1 next door',
      'Crane over 150 to 300 m',
    ])
    expect(content).toMatchObject({ holderId: null, hazards: {} })
  })

  test('a refusal names the field and keeps what was typed', async () => {
    const form = { from: 'segment', segment: 'SG-X2', second: 'SG-X2', celsius: '90', supply: 'HX-X' }
    const { status, html } = await post(form, bram, '/permits/new')
    expect(status).toBe(400)
    expect(html).toContain('SG-X2 is named twice')
    expect(tagOf(html, 'celsius')).toContain('value="90"')
    expect((await post({}, bram, '/permits/new')).html).toContain('Choose a bake plan or a segment')
  })

  test('a plan that is not there makes no draft', async () => {
    const before = (await db.select({ id: permit.id }).from(permit)).length
    expect((await post({ from: 'plan', link: '999:1' }, bram, '/permits/new')).status).toBe(404)
    expect(await db.select({ id: permit.id }).from(permit)).toHaveLength(before)
  })
})
