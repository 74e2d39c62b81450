/** The tablet pages of a permit as plain forms: what is sent, what comes back, and what a refusal keeps. */
import { beforeEach, describe, expect, test } from 'vitest'
import { isolationPoint, permitTest } from '#app/db/schema/index.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { request, signIn } from '#tests/support/app.ts'
import { MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import {
  createClock,
  createSegment,
  createSite,
  createUser,
  PASSWORD,
  type TestUser,
} from '#tests/support/factories.ts'
import { createPermitRow } from '#tests/support/permit-rows.ts'

const db = freshDatabase()
let pim: TestUser
let odalys: TestUser
let ione: TestUser
let number: string
let cookie: string

beforeEach(async () => {
  await createSite(db)
  await createClock(db, { baseAt: MORNING, baseMachineAt: machineNow() })
  await createSegment(db, { tag: 'SG-T1' })
  pim = await createUser(db, { roles: ['technician'], name: 'Pim' })
  odalys = await createUser(db, { roles: ['technician'], name: 'Odalys' })
  ione = await createUser(db, { roles: ['safety-officer'], name: 'Ione' })
  await createUser(db, { name: 'Wendel', noPassword: true })
  number = (
    await createPermitRow(db, { state: 'approved', createdBy: pim.personId, approvedBy: ione.personId })
  ).number
  cookie = await signIn(pim.personId)
})

const at = (path: string) => `/permits/${number}/site${path}`
const page = async (path: string, as = cookie) => (await request(at(path), { cookie: as })).text()
const post = (path: string, form: Record<string, string>, as = cookie) =>
  request(at(path), { cookie: as, form })

test('every page says whose session it is, how the permit stands, and that nothing here protects', async () => {
  for (const path of ['', '/locks', '/tests', '/rounds']) {
    const response = await request(at(path), { cookie })
    expect(response.status, path).toBe(200)
    const html = await response.text()
    expect(html, path).toMatch(/Signed in:.*Pim/)
    expect(html, path).toContain('Approved')
    expect(html, path).toContain('does not isolate, switch off or protect')
  }
})

test('a lock goes on and is verified by somebody else, by plain forms', async () => {
  const applied = await post('/locks', {
    act: 'apply',
    tag: 'IP-1',
    lockNumber: 'l 114',
    password: PASSWORD,
  })
  expect(applied.status).toBe(302)
  expect(applied.headers.get('Location')).toBe(at('/locks'))
  const [row] = await db.select().from(isolationPoint)
  expect(row?.lockNumber).toBe('L-114')
  const html = await page('/locks')
  expect(html).toContain('L-114')
  expect(html).toContain('not verified yet')
  const verify = {
    act: 'verify',
    pointId: String(row?.id),
    revision: '1',
    releasedHow: 'None stored in the handwheel',
    zeroEnergy: 'Does not move',
    password: PASSWORD,
  }
  const own = await post('/locks', verify)
  expect(own.status).toBe(422)
  const refusal = await own.text()
  expect(refusal).toContain('Pim applied L-114; somebody else verifies it')
  // What was typed comes back, and the password does not.
  expect(refusal).toContain('None stored in the handwheel')
  expect(refusal).not.toContain(PASSWORD)
  expect((await post('/locks', verify, await signIn(odalys.personId))).status).toBe(302)
  expect(await page('')).toContain('1 of 2')
})

test('a form whose lock was verified meanwhile still says why it was refused', async () => {
  await post('/locks', { act: 'apply', tag: 'IP-1', lockNumber: 'L-1', password: PASSWORD })
  const [row] = await db.select().from(isolationPoint)
  const verify = {
    act: 'verify',
    pointId: String(row?.id),
    revision: '1',
    releasedHow: 'None',
    zeroEnergy: 'Does not move',
    password: PASSWORD,
  }
  await post('/locks', verify, await signIn(odalys.personId))
  const late = await post(
    '/locks',
    verify,
    await signIn((await createUser(db, { roles: ['technician'] })).personId),
  )
  expect(late.status).toBe(409)
  expect(await late.text()).toContain('was verified by Odalys since this page was loaded')
})

test('an absent owner’s lock is an officer’s or engineer’s form, and a manager has none', async () => {
  await post('/locks', { act: 'apply', tag: 'IP-1', lockNumber: 'L-1', password: PASSWORD })
  const magnus = await createUser(db, { roles: ['manager'] })
  const absent = 'Its owner is not on site'
  expect(await page('/locks', await signIn(ione.personId))).toContain(absent)
  expect(await page('/locks', await signIn(odalys.personId))).not.toContain(absent)
  const seen = await page('/locks', await signIn(magnus.personId))
  expect(seen).toContain('L-1')
  expect(seen).not.toContain('type="password"')
  const [row] = await db.select().from(isolationPoint)
  const form = {
    act: 'remove-absent',
    pointId: String(row?.id),
    revision: '1',
    verifiedAbsent: 'Asked at both gates of the site',
    efforts: 'Rang three times, left word',
    informed: 'Note at the locker and on the board',
    password: PASSWORD,
  }
  expect((await post('/locks', form, await signIn(magnus.personId))).status).toBe(403)
  expect((await post('/locks', form, await signIn(ione.personId))).status).toBe(302)
})

test('low oxygen comes back as what to do, and stands on every page from then on', async () => {
  const response = await post('/tests', {
    form: 'oxygen|bay 5',
    kind: 'oxygen',
    place: 'bay 5',
    value: '19,2',
    takenAt: '2026-11-09 07:59',
  })
  expect(response.status).toBe(302)
  expect(await db.select().from(permitTest)).toMatchObject([{ value: 19.2, passed: false }])
  expect(await page('/rounds')).toMatch(/Danger: .*19\.2 % oxygen at SG-T1.*Leave at once/s)
})

test('a refused test keeps what was typed, in its own form and no other', async () => {
  const response = await post('/tests', {
    form: 'zero-voltage|bars',
    kind: 'zero-voltage',
    place: 'bars',
    value: '0.3',
    instrument: 'M-77 of the crew',
    takenAt: '2026-11-09 07:30',
  })
  expect(response.status).toBe(400)
  const html = await response.text()
  expect(html).toContain('The register has no M-77 of the crew')
  expect(html.match(/value="M-77 of the crew"/g)).toHaveLength(1)
  expect(html.match(/<details open=""/g)).toHaveLength(1)
})

test('the site check is written down without a signature; other acts are not taken here', async () => {
  const missing = await post('', {
    act: 'site-check',
    revision: '1',
    barriersPlaced: 'no',
    signsPosted: 'yes',
  })
  expect(missing.status).toBe(400)
  expect(await missing.text()).toContain('Say what is not in order')
  const approve = await post('', { act: 'approve', revision: '1', password: PASSWORD })
  expect(approve.status).toBe(400)
  const check = await post('', {
    act: 'site-check',
    revision: '1',
    barriersPlaced: 'yes',
    signsPosted: 'yes',
  })
  expect(check.status).toBe(302)
  expect(await page('')).toMatch(/Barriers and signs checked.*by.*Pim/s)
})

describe('a photo', () => {
  const PNG = Buffer.from('89504e470d0a1a0a0000000d49484452', 'hex')
  function send(file: File | null) {
    const body = new FormData()
    body.set('caption', 'Barrier at 0 m')
    if (file !== null) body.set('photo', file)
    return request(at('?photo'), { cookie, body })
  }

  test('is kept and comes back as a download that no browser takes for a page', async () => {
    expect((await send(new File([PNG], 'IMG <1>.png', { type: 'text/html' }))).status).toBe(302)
    const html = await page('')
    const href = /\/permits\/[^"]+\/photos\/\d+/.exec(html)?.[0] ?? ''
    const photo = await request(href, { cookie })
    expect(photo.status).toBe(200)
    expect(photo.headers.get('Content-Type')).toBe('image/png')
    expect(photo.headers.get('X-Content-Type-Options')).toBe('nosniff')
    expect(photo.headers.get('Content-Disposition')).toMatch(
      /^attachment; filename="[\w.-]+"; filename\*=UTF-8''/,
    )
    expect(Buffer.from(await photo.arrayBuffer()).equals(PNG)).toBe(true)
    expect((await request(href)).status).toBe(302)
  })

  test('that is none, or none at all, is refused with the caption kept', async () => {
    const page = await send(new File(['<script>alert(1)</script>'], 'x.png', { type: 'image/png' }))
    expect(page.status).toBe(415)
    expect(await page.text()).toContain('value="Barrier at 0 m"')
    expect((await send(null)).status).toBe(400)
  })
})
