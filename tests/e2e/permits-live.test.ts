/**
 * Work stopped, let go on, run out and handed back, and bad air, in a browser. These scenes move the clock and end the
 * demo's own permits, so they have a demo to themselves; each goes on where the one before has left it.
 */
import { eq } from 'drizzle-orm'
import type { Browser, Locator, Page } from 'playwright-core'
import { afterAll, beforeAll, expect, test } from 'vitest'
import { permitAct } from '#app/db/schema/index.ts'
import { at } from '#seeds/demo-time.ts'
import { expectAccessible, launchBrowser } from '#tests/support/browser.ts'
import { passwordOf, type ScenePerson, type Scenes, scenesOf } from '#tests/support/permit-scenes.ts'
import { startTestServer, type TestServer } from '#tests/support/server.ts'

/** A server that is busy with other work still answers within this. */
const SOON = { timeout: 45_000 }
const MINUTE_MS = 60_000
const HOUR_MS = 3_600_000
const BAKE = '/permits/HSP-2026-031'
const COOLING = '/permits/HSP-2026-030'

let server: TestServer
let browser: Browser
let scenes: Scenes

beforeAll(async () => {
  server = await startTestServer({ database: 'ebbline_e2e_permits' })
  browser = await launchBrowser()
  scenes = scenesOf(server.databaseUrl, server.url)
}, 600_000)

afterAll(async () => {
  await browser?.close()
  await scenes?.close()
  await server?.stop()
})

function region(page: Page, title: string): Locator {
  return page.getByRole('region', { name: title, exact: true })
}

function dangers(page: Page): Locator {
  return page.getByRole('alert', { name: 'Dangers' })
}

/** As the demo's site writes it in November: an hour ahead of UTC. */
function siteTime(instant: Date): string {
  return new Date(instant.getTime() + HOUR_MS).toISOString().slice(0, 16).replace('T', ' ')
}

async function sign(page: Page, title: string, who: ScenePerson, button: string): Promise<void> {
  const form = region(page, title)
  await form.getByLabel('Your own password, as your signature').fill(passwordOf(who))
  await form.getByRole('button', { name: button }).click()
}

async function moveClock(to: Date): Promise<void> {
  const juniper = await scenes.open(browser, 'juniper')
  await juniper.goto('/clock')
  await juniper.page.getByLabel('New site time').fill(siteTime(to))
  await juniper.page.getByLabel('What do you want to watch?').fill('What time does to permits')
  await juniper.page.getByRole('button', { name: 'Move the clock' }).click()
  await expect.poll(() => scenes.now(), SOON).toSatisfy((now: Date) => now >= to)
  await juniper.close()
}

async function sayHeating(who: ScenePerson, permit: string, on: boolean, how: string): Promise<void> {
  const view = await scenes.open(browser, who)
  await view.goto(`${permit}/heating`)
  await view.page.getByLabel(on ? 'On' : 'Off', { exact: true }).check()
  await view.page.getByLabel('Supply set that you looked at').selectOption(permit === BAKE ? 'HX-1' : 'HX-2')
  await view.page.getByLabel('How you know').fill(how)
  await view.page.getByRole('button', { name: 'Write it down' }).click()
  await view.page.getByRole('row').filter({ hasText: how }).waitFor(SOON)
  await view.close()
}

test('stopped with the heating on: a danger until it is off or an officer says why not, and the sheet says SUSPENDED', async () => {
  await sayHeating('pim', BAKE, true, 'HX-1 shows 1083 A')
  const ione = await scenes.open(browser, 'ione')
  const { page } = ione
  await ione.goto(BAKE)
  const card = region(page, 'Stop card')
  await card.getByLabel('Why work stops').fill('Extraction fan of the bay has failed')
  await card.getByRole('button', { name: 'Stop the work' }).click()
  await dangers(page).getByText('Danger: Permit suspended with the heating on').waitFor(SOON)
  await dangers(page)
    .getByText('Have the heating made safe: who, when and how is asked for.', { exact: false })
    .waitFor()
  await expectAccessible(page)

  await ione.goto(`${BAKE}?act=made-safe`)
  const safe = region(page, 'Made safe')
  await safe.getByRole('button', { name: 'Made safe' }).click()
  expect(
    await safe.getByLabel('Who made it safe').evaluate((one: HTMLInputElement) => one.validity.valid),
  ).toBe(false)
  await safe.getByLabel('Who made it safe').fill('Pim Larkspur')
  await safe.getByLabel('How', { exact: true }).fill('Everybody is out, barriers shut, current held low')
  await safe.getByRole('button', { name: 'Made safe' }).click()
  await page.getByText('Written down.').waitFor(SOON)
  await dangers(page).getByText('Danger: Permit suspended with the heating on').waitFor()

  await dangers(page).getByRole('link', { name: 'Write why it goes on' }).click()
  await page.waitForURL(/permits\/dangers/)
  await page
    .getByLabel('Why the heating goes on', { exact: false })
    .fill('A cold stop would open joint 7; watched from VB-04.')
  await sign(page, 'Write why a heating goes on', 'ione', 'Sign: it goes on')
  await dangers(page).getByText('It goes on by the word of Ione Castellbrook').waitFor(SOON)

  await ione.goto(`${BAKE}/print`)
  const sheets = page.locator('.posted-sheet')
  expect(await sheets.first().innerText()).toMatch(/SUSPENDED\s+HSP-2026-031\s+SG-05/)
  expect(await sheets.first().innerText()).toContain('Extraction fan of the bay has failed')
  await ione.close()

  const corwin = await scenes.open(browser, 'corwin')
  await corwin.goto('/')
  await corwin.page
    .getByRole('alert')
    .filter({ hasText: 'Permit suspended with the heating on (HSP-2026-031)' })
    .waitFor()
  await corwin.goto(BAKE)
  await dangers(corwin.page).getByText('A cold stop would open joint 7', { exact: false }).waitFor()
  expect(await corwin.page.getByRole('link', { name: 'Let it go on' }).count()).toBe(0)
  await corwin.close()
})

test('it goes on after tests and a site check, until the end of the validity it had', async () => {
  const ione = await scenes.open(browser, 'ione')
  await ione.goto(`${BAKE}?act=resume`)
  const reasons = (await region(ione.page, 'Let it go on').getByRole('listitem').allInnerTexts()).join('\n')
  expect(reasons).toMatch(/The site has not been checked since work was stopped/)
  expect(reasons).toMatch(/Oxygen.*the last result is from before work was stopped/)

  await scenes.test('HSP-2026-031', 'odalys', ['oxygen'])
  const odalys = await scenes.open(browser, 'odalys', { viewport: { width: 820, height: 1180 } })
  const { page } = odalys
  await odalys.goto(`${BAKE}/site/tests`)
  const oxygen = region(page, 'Oxygen')
  await oxygen.getByText('Write another one down').click()
  await oxygen.getByLabel('Figure, in %').fill('20.8')
  await oxygen.getByLabel('Serial number of the instrument').fill('OM-4471')
  await oxygen.getByLabel('Calibrated up to and including').fill('2027-03-31')
  await oxygen.getByRole('button', { name: 'Write it down' }).click()
  await page.getByText(/20\.8 %: passed, written down/).waitFor(SOON)
  await odalys.goto(`${BAKE}/site`)
  await page.getByLabel('They stand', { exact: true }).check()
  await page.getByLabel('They are up', { exact: true }).check()
  await page.getByRole('button', { name: 'Write the check down' }).click()
  await page.getByText('Site check written down.').waitFor(SOON)
  await odalys.close()

  await ione.goto(`${BAKE}?act=resume`)
  const form = region(ione.page, 'Let it go on')
  expect(await form.getByText('As things stand this will be refused').count()).toBe(0)
  await form.getByLabel('What was put right').fill('Fan proven, flow 0.6 m/s at the grille')
  await sign(ione.page, 'Let it go on', 'ione', 'Sign: let it go on')
  await ione.page.getByText('Live again.').waitFor(SOON)
  expect(await scenes.permit('HSP-2026-031')).toMatchObject({
    state: 'issued',
    currentUntil: at('2026-11-09 18:00'),
  })
  await region(ione.page, 'Validity').getByText('until 9 Nov 2026, 18:00 (UTC+01:00)').waitFor()
  expect(await dangers(ione.page).count()).toBe(0)
  const { id } = await scenes.permit('HSP-2026-031')
  const acts = await scenes.db.select().from(permitAct).where(eq(permitAct.permitId, id))
  const [stop, goesOn] = (['suspend', 'resume'] as const).map((act) =>
    acts.findLast((one) => one.act === act),
  )
  if (stop === undefined || goesOn === undefined)
    throw new Error('The stop or the resumption is not on record.')
  const { suspendedHours } = goesOn.detail as { suspendedHours: number }
  expect(suspendedHours).toBeGreaterThan(0)
  expect(suspendedHours).toBeCloseTo((goesOn.at.getTime() - stop.at.getTime()) / HOUR_MS, 4)
  await ione.close()
})

test('a permit is not cancelled while a lock hangs for it; the written procedure clears an absent owner’s', async () => {
  const corwin = await scenes.open(browser, 'corwin')
  await corwin.goto(`${COOLING}?act=hand-back`)
  const form = region(corwin.page, 'Hand back')
  await form.getByLabel('The work', { exact: true }).selectOption('complete')
  await form.getByLabel('State in which the plant is left').fill('Cooling, under vacuum, supply off')
  await form.getByLabel('Hottest surface', { exact: false }).fill('38')
  await form.getByLabel('Everybody is clear').check()
  await form.getByLabel('Tools and materials are out').check()
  await form.getByLabel('Locks', { exact: true }).selectOption('left')
  await form
    .getByLabel('If some are left: which, and why')
    .fill('All six until inspection; Wendel is at the grid station')
  await sign(corwin.page, 'Hand back', 'corwin', 'Sign: hand back')
  await corwin.page.getByText('Handed back. An officer inspects the site.').waitFor(SOON)
  await corwin.close()
  // Nobody takes a lock away while it is not known that the heating is off.
  await sayHeating('corwin', COOLING, false, 'HX-2 at 0 A, its output locked off')
  for (const lock of ['L-104', 'L-105', 'L-106', 'L-107', 'L-108']) await scenes.unlock('HSP-2026-030', lock)

  const ione = await scenes.open(browser, 'ione')
  const { page } = ione
  await ione.goto(`${COOLING}?act=cancel`)
  const cancel = region(page, 'Cancel')
  await cancel.getByText(/One lock still hangs for this permit: L-109/).waitFor()
  await cancel.getByLabel('What you found at the segment').fill('Clean, 36 °C at the hottest flange')
  await sign(page, 'Cancel', 'ione', 'Sign: cancel')
  const refusal = page.getByRole('alert').filter({ hasText: 'nothing has been changed' })
  await refusal.waitFor(SOON)
  expect(await refusal.innerText()).toMatch(
    /L-109.*Its owner removes it.*owner who is away.*transferred to another permit/s,
  )
  expect(await cancel.getByLabel('What you found at the segment').inputValue()).toMatch(/36 °C/)
  expect((await scenes.permit('HSP-2026-030')).state).toBe('handed-back')

  await ione.goto(`${COOLING}/site/locks`)
  await page.getByText('Its owner is not on site').click()
  await page
    .getByLabel('How you made sure that the owner is not on site')
    .fill('Gate log: left at seven, no car in the yard.')
  await page
    .getByLabel('What was done to reach and tell the owner')
    .fill('Called at 08:20, told him on the telephone.')
  await page
    .getByLabel('How the owner will know before they resume work')
    .fill('Note on his locker and on the key board.')
  await page
    .getByLabel(/^Password of Ione Castellbrook/)
    .last()
    .fill(passwordOf('ione'))
  await page.getByRole('button', { name: 'Sign: taken away, owner absent' }).click()
  await page.getByText(/Taken away by Ione Castellbrook.*its owner absent/).waitFor(SOON)

  await ione.goto(`${COOLING}?act=cancel`)
  await cancel.getByLabel('What you found at the segment').fill('Clean, 36 °C at the hottest flange')
  await sign(page, 'Cancel', 'ione', 'Sign: cancel')
  await page.getByText('Cancelled. Take the posted copies down.').waitFor(SOON)
  expect((await scenes.permit('HSP-2026-030')).state).toBe('cancelled')
  await ione.close()
})

test('low oxygen closes the stretch for everybody until an officer releases it on ten minutes of good air', async () => {
  const nerys = await scenes.open(browser, 'nerys', { viewport: { width: 390, height: 844 } })
  const { page } = nerys
  const closedAt = new Date(Math.floor((await scenes.now()).getTime() / MINUTE_MS) * MINUTE_MS)
  async function read(percent: string, when: Date): Promise<void> {
    await nerys.goto('/permits/bays')
    await page.getByLabel('Beside which segment').selectOption('SG-14')
    await page.getByLabel('Oxygen, %').fill(percent)
    await page.getByLabel('Where exactly').fill('1 960 m, at the vent valve')
    await page.getByLabel('When', { exact: true }).fill(siteTime(when))
    await page.getByLabel('Instrument', { exact: true }).fill('OXP-07')
    await page.getByRole('button', { name: 'Write the reading down' }).click()
    await page
      .getByRole('row')
      .filter({ hasText: `${Number(percent).toFixed(1)} %` })
      .first()
      .waitFor(SOON)
  }
  await read('19.2', closedAt)
  const closed = page.getByRole('region', { name: /^Closed: .* 1950 to 2100 m$/ })
  await closed.getByText(/Do not go in to help anybody without breathing apparatus/).waitFor()
  await closed.getByText('Not yet to be released.', { exact: false }).waitFor()
  await expectAccessible(page)
  await nerys.goto('/')
  await page
    .getByText(/1950 (to|–) 2100 m/)
    .first()
    .waitFor()
  await nerys.goto('/permits/dangers')
  const danger = dangers(page).getByRole('listitem').filter({ hasText: 'Danger: Too little oxygen' })
  expect(await danger.innerText()).toMatch(/19\.2 % oxygen at SG-14.*Leave at once/s)
  expect(await danger.getByRole('link').allInnerTexts(), 'nothing to put it aside with').toEqual([
    'Closed stretches and readings',
  ])

  await moveClock(new Date(closedAt.getTime() + 14 * MINUTE_MS))
  const ione = await scenes.open(browser, 'ione')
  await read('20.4', new Date(closedAt.getTime() + 2 * MINUTE_MS))
  await read('20.6', new Date(closedAt.getTime() + 7 * MINUTE_MS))
  await ione.goto('/permits/bays')
  expect(await ione.page.getByRole('button', { name: 'Sign: open the stretch again' }).count()).toBe(0)
  await read('20.7', new Date(closedAt.getTime() + 13 * MINUTE_MS))
  await nerys.close()

  await ione.goto('/permits/bays')
  const release = ione.page.getByRole('region', { name: /^Closed: .* 1950 to 2100 m$/ })
  await release
    .getByLabel('Why it is safe to enter again')
    .fill('Hose found and shut, bay aired for a quarter of an hour')
  await release.getByLabel('Your own password, as your signature').fill(passwordOf('ione'))
  await release.getByRole('button', { name: 'Sign: open the stretch again' }).click()
  await ione.page.getByText('No stretch is closed.').waitFor(SOON)
  await ione.goto('/permits/dangers')
  expect(await dangers(ione.page).getByText('Too little oxygen').count()).toBe(0)
  await ione.close()
})

test('a missed revalidation with the heating on: expired at that second, a danger, and never live again', async () => {
  await moveClock(at('2026-11-09 17:50'))
  await sayHeating('corwin', BAKE, true, 'HX-1 still shows 1083 A')
  await moveClock(at('2026-11-09 18:01'))
  await expect.poll(async () => (await scenes.permit('HSP-2026-031')).state, SOON).toBe('expired')
  const { id, revision } = await scenes.permit('HSP-2026-031')
  const acts = await scenes.db.select().from(permitAct).where(eq(permitAct.permitId, id))
  expect(acts.at(-1)).toMatchObject({ act: 'expire', personId: null, at: at('2026-11-09 18:00') })

  const ione = await scenes.open(browser, 'ione')
  const { page } = ione
  await ione.goto(BAKE)
  await dangers(page).getByText('Danger: Permit ran out with the heating on').waitFor()
  await dangers(page).getByText('Danger: Revalidation missed').waitFor()
  const words = await dangers(page).innerText()
  expect(words).toMatch(/cannot be made live again/)
  expect(words).toMatch(/hand back, or ask for a new permit/i)
  await expectAccessible(page)
  for (const act of ['Let it go on', 'Revalidate', 'Extend', 'Approve']) {
    expect(await page.getByRole('link', { name: act, exact: true }).count(), act).toBe(0)
  }
  const status = await page.evaluate(
    async ([to, form]) => (await fetch(to, { method: 'POST', body: new URLSearchParams(form) })).status,
    [
      BAKE,
      { act: 'resume', revision: String(revision), reason: 'All is well', password: passwordOf('ione') },
    ] as const,
  )
  expect(status).toBe(422)
  expect(await scenes.permit('HSP-2026-031')).toMatchObject({ state: 'expired', revision })
  await ione.close()

  const pim = await scenes.open(browser, 'pim')
  await pim.goto(`${BAKE}?act=hand-back`)
  await region(pim.page, 'Hand back').getByText('Heating is recorded as on.', { exact: false }).waitFor()
  await pim.close()
  await sayHeating('pim', BAKE, false, 'Breaker of HX-1 off and locked, 0 A')
  const after = await scenes.open(browser, 'pim')
  await after.goto(`${BAKE}?act=hand-back`)
  expect(
    await region(after.page, 'Hand back').getByText('As things stand this will be refused').count(),
  ).toBe(0)
  expect(await dangers(after.page).getByText('Permit ran out with the heating on').count()).toBe(0)
  await dangers(after.page).getByText('Danger: Revalidation missed').waitFor()
  await after.close()
})
