/** From a request to a live permit, and what keeps the wrong people and the wrong terms from it, in a browser. */
import { eq } from 'drizzle-orm'
import type { Browser, Locator, Page } from 'playwright-core'
import { afterAll, beforeAll, expect, inject, test } from 'vitest'
import { roleGrant } from '#app/db/schema/index.ts'
import { at } from '#seeds/demo-time.ts'
import { PERSON_ID } from '#seeds/people.ts'
import { expectAccessible, launchBrowser } from '#tests/support/browser.ts'
import { press, type } from '#tests/support/keyboard.ts'
import { passwordOf, type Scenes, scenesOf } from '#tests/support/permit-scenes.ts'

/** A server that is busy with other work still answers within this. */
const SOON = { timeout: 30_000 }
const HOUR_MS = 3_600_000
const TABLET = { viewport: { width: 820, height: 1180 } }

let browser: Browser
let scenes: Scenes

beforeAll(async () => {
  browser = await launchBrowser()
  scenes = scenesOf(inject('demoDatabaseUrl'), inject('demoUrl'))
})

afterAll(async () => {
  await browser?.close()
  await scenes?.close()
})

function mainOf(page: Page): Locator {
  return page.getByRole('main')
}

function actForm(page: Page, title: string): Locator {
  return page.getByRole('region', { name: title, exact: true })
}

/** Sends what no page offers to this person, from their own page. */
async function post(
  page: Page,
  path: string,
  form: Record<string, string>,
): Promise<{ status: number; text: string }> {
  return await page.evaluate(
    async ([to, fields]) => {
      const answer = await fetch(to, { method: 'POST', body: new URLSearchParams(fields) })
      const text = new DOMParser().parseFromString(await answer.text(), 'text/html').body.textContent
      return { status: answer.status, text: text ?? '' }
    },
    [path, form] as const,
  )
}

test('approved by keyboard, it is live only once its holder accepts it on site, and the posted copy says so', async () => {
  const from = new Date((await scenes.now()).getTime() - 10 * 60_000)
  const number = await scenes.draft({
    segment: 'SG-03',
    supply: 'HX-3',
    from,
    hours: 80,
    holder: 'pim',
    deputy: 'odalys',
  })
  await scenes.act('bram', number, 'request')

  const ione = await scenes.open(browser, 'ione')
  await ione.goto(`/permits/${number}`)
  await press(ione.page, mainOf(ione.page).getByRole('link', { name: 'Approve', exact: true }))
  await ione.page.waitForURL(/act=approve/)
  await expectAccessible(ione.page)
  const approval = actForm(ione.page, 'Approve')
  expect(await approval.getByText('As things stand this will be refused').count()).toBe(0)
  await type(ione.page, approval.getByLabel('Your own password, as your signature'), passwordOf('ione'))
  await ione.page.keyboard.press('Enter')
  await ione.page.getByText('It is live once its holder accepts it on site.', { exact: false }).waitFor(SOON)
  await ione.page.getByText('Begins when the holder accepts on site.').waitFor()
  await ione.goto(`/permits/${number}/print`)
  expect(await mainOf(ione.page).innerText()).toMatch(/NOT YET LIVE/)
  await ione.close()

  const odalys = await scenes.open(browser, 'odalys', TABLET)
  await odalys.goto(`/permits/${number}/site/locks`)
  const point = actForm(odalys.page, 'IP-03-1')
  await point.getByText('Apply a lock').click()
  await point.getByLabel('Lock number').fill('L-131')
  await point.getByLabel(/^Password of Odalys Fennimore/).fill(passwordOf('odalys'))
  await point.getByRole('button', { name: 'Sign: lock applied' }).click()
  await point.getByText('not verified yet').waitFor(SOON)
  await point.getByText('Verify this lock').click()
  await point.getByLabel('How stored energy was released').fill('Nothing stored')
  await point.getByLabel('What trying or measuring it gave').fill('Handwheel does not move')
  await point
    .getByLabel(/^Password of Odalys Fennimore/)
    .first()
    .fill(passwordOf('odalys'))
  await point.getByRole('button', { name: 'Sign: verified' }).click()
  await point.getByRole('alert').waitFor(SOON)
  expect(await point.getByText('not verified yet').count(), 'nobody verifies a lock of their own').toBe(1)
  await odalys.close()

  await scenes.lock(number, [null, 'L-132', 'L-133', 'L-134', 'L-135', 'L-136'], {
    applies: 'odalys',
    verifies: 'pim',
  })
  await scenes.test(number, 'pim', ['oxygen'])

  const pim = await scenes.open(browser, 'pim', TABLET)
  const main = mainOf(pim.page)
  await pim.goto(`/permits/${number}?act=accept`)
  const early = actForm(pim.page, 'Accept on site')
  await early.getByText('As things stand this will be refused').waitFor()
  const reasons = (await early.getByRole('listitem').allInnerTexts()).join('\n')
  expect(reasons).toMatch(/The site has not been checked since it was approved/)
  expect(reasons).toMatch(/IP-03-1 is locked and not verified/)
  expect(reasons).toMatch(/Oxygen.*there is no result yet/)

  await pim.goto(`/permits/${number}/site/locks`)
  const mine = actForm(pim.page, 'IP-03-1')
  await mine.getByText('Verify this lock').click()
  await mine.getByLabel('How stored energy was released').fill('Nothing stored')
  await mine.getByLabel('What trying or measuring it gave').fill('Handwheel does not move')
  await mine
    .getByLabel(/^Password of Pim Larkspur/)
    .first()
    .fill(passwordOf('pim'))
  await mine.getByRole('button', { name: 'Sign: verified' }).click()
  await mine.getByText(/^Verified by Pim Larkspur/).waitFor(SOON)

  await pim.goto(`/permits/${number}/site/tests`)
  const oxygen = actForm(pim.page, 'Oxygen')
  await oxygen.getByText('Write a test down').click()
  await oxygen.getByLabel('Figure, in %').fill('20,8')
  await oxygen.getByLabel('Serial number of the instrument').fill('OM-4471')
  await oxygen.getByLabel('Calibrated up to and including').fill('2027-03-31')
  await oxygen.getByRole('button', { name: 'Write it down' }).click()
  await pim.page.getByText(/20\.8 %: passed, written down/).waitFor(SOON)

  await pim.goto(`/permits/${number}/site`)
  await main.getByLabel('They stand', { exact: true }).check()
  await main.getByLabel('They are up', { exact: true }).check()
  await expectAccessible(pim.page)
  await main.getByRole('button', { name: 'Write the check down' }).click()
  await pim.page.getByText('Site check written down.').waitFor(SOON)
  expect((await scenes.permit(number)).state).toBe('approved')

  await pim.goto(`/permits/${number}?act=accept`)
  const accept = actForm(pim.page, 'Accept on site')
  expect(await accept.getByText('As things stand this will be refused').count()).toBe(0)
  await accept.getByLabel(/^I am at the segment/).check()
  await accept.getByLabel('Your own password, as your signature').fill(passwordOf('pim'))
  await accept.getByRole('button', { name: 'Sign: accept on site' }).click()
  await pim.page.getByText('Accepted. The permit is live.').waitFor(SOON)
  const { state, holderId, windowTo } = await scenes.permit(number)
  expect({ state, holderId }).toEqual({ state: 'issued', holderId: PERSON_ID.pim })

  await pim.goto(`/permits/${number}/print`)
  const posted = await main.innerText()
  const locks = [...posted.matchAll(/\bL-\d{3}\b/g)].map(([lock]) => lock)
  expect([...new Set(locks)]).toEqual(['L-131', 'L-132', 'L-133', 'L-134', 'L-135', 'L-136'])
  expect(posted).toContain(
    `${siteTime(from)} (UTC+01:00) to ${siteTime(windowTo as Date)} (UTC+01:00), 80 hours`,
  )
  expect(posted).not.toMatch(/NOT A PERMIT|NOT YET LIVE|NOT LIVE|SUSPENDED|NOT LOCKED|NOT VERIFIED/)
  await pim.page.emulateMedia({ media: 'print' })
  expect(await inksOf(pim.page), 'every word in black on white').toEqual(['black on white'])
  await pim.close()
})

/** As the demo's site writes it in November: an hour ahead of UTC. */
function siteTime(instant: Date): string {
  return new Date(instant.getTime() + HOUR_MS).toISOString().slice(0, 16).replace('T', ' ')
}

/** Which inks the sheets are printed with: any that is not near black on near white is told as it is. */
async function inksOf(page: Page): Promise<string[]> {
  return await page.evaluate(() => {
    const levels = (colour: string) => (colour.match(/[\d.]+/g) ?? []).map(Number)
    const inks = new Set<string>()
    for (const element of document.querySelectorAll('.posted-sheet *')) {
      const words = [...element.childNodes].some(
        (node) => node.nodeType === Node.TEXT_NODE && (node.textContent ?? '').trim() !== '',
      )
      if (!words || !element.checkVisibility()) continue
      const { color, backgroundColor } = getComputedStyle(element)
      const [ink, paper] = [levels(color), levels(backgroundColor)]
      const dark = ink.slice(0, 3).every((level) => level <= 80)
      const clear = paper[3] === 0 || paper.slice(0, 3).every((level) => level >= 230)
      inks.add(dark && clear ? 'black on white' : `${color} on ${backgroundColor}: ${element.textContent}`)
    }
    return [...inks]
  })
}

test('who planned the bake may not approve its permit, is told who can, and the attempt is on record', async () => {
  const now = await scenes.now()
  const since = new Date(now.getTime() - 72 * HOUR_MS)
  const grant = {
    personId: PERSON_ID.bram,
    role: 'safety-officer' as const,
    startsAt: since,
    grantedBy: PERSON_ID.juniper,
    grantedAt: since,
    confirmedBy: PERSON_ID.magnus,
    confirmedAt: since,
    reason: 'Stands in for the safety officer this week',
  }
  const [{ insertId }] = await scenes.db.insert(roleGrant).values(grant)
  try {
    const bram = await scenes.open(browser, 'bram')
    await bram.goto('/permits/HSP-2026-032')
    await mainOf(bram.page).getByRole('link', { name: 'Approve', exact: true }).click()
    const form = actForm(bram.page, 'Approve')
    await form
      .getByText('You planned the bake that it is for. Another officer has to decide on it.')
      .waitFor()
    await form.getByLabel('Your own password, as your signature').fill(passwordOf('bram'))
    await form.getByRole('button', { name: 'Sign: approve' }).click()
    const refusal = bram.page.getByRole('alert').filter({ hasText: 'nothing has been changed' })
    await refusal.waitFor(SOON)
    expect(await refusal.innerText()).toContain('You can ask Ione Castellbrook or Rafe Moonthorn.')
    await bram.close()
  } finally {
    await scenes.db
      .update(roleGrant)
      .set({ revokedAt: await scenes.now(), revokedBy: PERSON_ID.juniper, revokeReason: 'The week is over' })
      .where(eq(roleGrant.id, insertId))
  }
  expect(await scenes.permit('HSP-2026-032')).toMatchObject({ state: 'requested', approvedBy: null })
  const juniper = await scenes.open(browser, 'juniper')
  await juniper.goto(`/people/record?person=${PERSON_ID.bram}`)
  const line = juniper.page.getByRole('row').filter({ hasText: 'permit attempt blocked' }).first()
  expect(await line.innerText()).toContain('HSP-2026-032')
  await juniper.close()
})

test('a licence that ends inside the window blocks approval with its date, until the window is shorter', async () => {
  const number = await scenes.draft({
    segment: 'SG-15',
    supply: 'HX-1',
    from: at('2026-11-18 06:00'),
    hours: 156,
    holder: 'odalys',
    deputy: 'pim',
  })
  await scenes.act('bram', number, 'request')

  const ione = await scenes.open(browser, 'ione')
  for (const each of ['HSP-2026-032', number]) {
    await ione.goto(`/permits/${each}?act=approve`)
    const blocked = actForm(ione.page, 'Approve').getByRole('listitem').filter({ hasText: 'QE-1187' })
    expect(await blocked.innerText()).toMatch(
      /^K8: Wendel Quarrie, electrician: .*ends with the day 2026-11-20/,
    )
    expect(await blocked.innerText()).toMatch(/another electrician.*or end the window by 2026-11-21 00:00/)
  }
  await actForm(ione.page, 'Approve')
    .getByLabel('Your own password, as your signature')
    .fill(passwordOf('ione'))
  await ione.page.getByRole('button', { name: 'Sign: approve' }).click()
  const refusal = ione.page.getByRole('alert').filter({ hasText: 'nothing has been changed' })
  await refusal.waitFor(SOON)
  expect(await refusal.innerText()).toContain('2026-11-20')
  expect((await scenes.permit(number)).state).toBe('requested')

  await ione.goto(`/permits/${number}?act=return`)
  const back = actForm(ione.page, 'Send back')
  await back.getByLabel('What has to change').fill('End by the evening of the 20th: the licence ends then.')
  await back.getByLabel('Your own password, as your signature').fill(passwordOf('ione'))
  await back.getByRole('button', { name: 'Sign: send back' }).click()
  await ione.page.getByText('Sent back.').waitFor(SOON)

  const bram = await scenes.open(browser, 'bram')
  await bram.goto(`/permits/${number}/edit`)
  await bram.page.getByLabel('Window ends').fill('2026-11-20 18:00')
  await bram.page.getByRole('button', { name: 'Save and go on to request' }).last().click()
  await bram.page.waitForURL(/act=request/, SOON)
  const ask = actForm(bram.page, 'Ask for it')
  await ask.getByLabel('Your own password, as your signature').fill(passwordOf('bram'))
  await ask.getByRole('button', { name: 'Sign: ask for it' }).click()
  await bram.page.getByText('It waits for a safety officer.', { exact: false }).waitFor(SOON)
  await bram.close()

  await ione.goto(`/permits/${number}?act=approve`)
  const form = actForm(ione.page, 'Approve')
  expect(await form.getByText('As things stand this will be refused').count()).toBe(0)
  await form.getByLabel('Your own password, as your signature').fill(passwordOf('ione'))
  await form.getByRole('button', { name: 'Sign: approve' }).click()
  await ione.page.getByText('Approved for its window.', { exact: false }).waitFor(SOON)
  await ione.close()
})

test('a leak check beside hot steel begins only where an officer has left it, behind a barrier', async () => {
  const start = await scenes.now()
  const odalys = await scenes.open(browser, 'odalys')
  const { page } = odalys
  await odalys.goto('/permits/works/new')
  await page.getByLabel('Kind of work').selectOption('leak-check')
  await page.getByLabel('What will be done').fill('Spray along all of SG-06')
  await page.getByLabel('Where', { exact: true }).selectOption('segment:SG-06')
  await page.getByLabel('Stretch from, m').fill('750')
  await page.getByLabel('to, m', { exact: true }).fill('900')
  await page.getByLabel('Begins', { exact: true }).fill(siteTime(start))
  await page.getByLabel('Ends', { exact: true }).fill(siteTime(new Date(start.getTime() + 3 * HOUR_MS)))
  await page.getByLabel('Who will be there').fill('Odalys Fennimore and a second')
  await page.getByRole('button', { name: 'Plan it' }).click()
  await page.waitForURL(/works\/\d+$/, SOON)
  const address = new URL(page.url()).pathname
  const met = actForm(page, 'What it would meet')
  const people = met.getByRole('listitem').filter({ hasText: 'K3' }).filter({ hasText: 'HSP-2026-031' })
  expect(await people.innerText()).toMatch(/keeps it from beginning/)
  expect(await people.innerText()).toMatch(/750 (to|–) 760 m/)
  expect(await met.locator('svg').first().textContent()).toMatch(/K3 HSP-2026-031/)
  await page.getByRole('button', { name: 'It begins now' }).click()
  await page.getByRole('alert').filter({ hasText: 'K3' }).waitFor(SOON)
  await page
    .getByText(/· planned ·/)
    .first()
    .waitFor()

  const ione = await scenes.open(browser, 'ione')
  await ione.goto(address)
  const limit = actForm(ione.page, 'Limit it')
  await limit.getByText(/Outside all that is in the way lies 760 to 900 m/).waitFor()
  await limit.getByLabel('Only from, m').fill('760')
  await limit.getByLabel('to, m', { exact: true }).fill('900')
  await limit.getByLabel('Barrier', { exact: true }).fill('Mesh door at 760 m, locked')
  await limit.getByLabel('Ruling in words').fill('East of the mesh door only; nobody goes past it.')
  await limit.getByLabel('Your own password, as your signature').fill(passwordOf('ione'))
  await limit.getByRole('button', { name: 'Sign the limit' }).click()
  await actForm(ione.page, 'The officer’s ruling').getByText('Only 760 to 900 m').waitFor(SOON)
  await expectAccessible(ione.page)
  await ione.close()

  await odalys.goto(address)
  await page.getByText('Mesh door at 760 m, locked').first().waitFor()
  await page.getByRole('button', { name: 'It begins now' }).click()
  await page.getByRole('button', { name: 'It is finished, people are out' }).click(SOON)
  await page.getByText('The work is over', { exact: false }).waitFor(SOON)
  await odalys.close()
})

test('the manager approves nothing and clears no lock, whatever is sent, but sets the priority of a bake', async () => {
  const magnus = await scenes.open(browser, 'magnus')
  const { page } = magnus
  await magnus.goto('/permits/HSP-2026-032')
  expect(await mainOf(page).getByRole('link', { name: 'Approve', exact: true }).count()).toBe(0)
  const { revision, planId } = await scenes.permit('HSP-2026-032')
  const approval = await post(page, '/permits/HSP-2026-032', {
    act: 'approve',
    revision: String(revision),
    password: passwordOf('magnus'),
  })
  expect(approval.status).toBe(403)
  expect(approval.text).toMatch(/This takes a safety officer, whatever the rank of others/)
  expect(await scenes.permit('HSP-2026-032')).toMatchObject({ state: 'requested', revision })

  await magnus.goto('/permits/HSP-2026-031/site/locks')
  await mainOf(page).getByText('L-114').first().waitFor()
  expect(
    await mainOf(page)
      .getByText(/Take this lock away|Its owner is not on site/)
      .count(),
  ).toBe(0)
  const cleared = await post(page, '/permits/HSP-2026-031/site/locks', {
    act: 'remove-absent',
    pointId: '1',
    revision: '2',
    verifiedAbsent: 'Nobody has seen her at the gate today.',
    efforts: 'Called twice without an answer.',
    informed: 'A note lies on her desk.',
    password: passwordOf('magnus'),
  })
  expect(cleared.status).toBe(403)
  expect(cleared.text).toMatch(/This needs one of: .*You are signed in as Magnus Underhay/)

  await magnus.goto(`/bakes/plans/${planId}`)
  const priority = actForm(page, 'Priority')
  await priority.getByLabel('Where two bakes want the same thing').selectOption('urgent')
  await priority.getByLabel('Why').fill('The beam is promised for December')
  await priority.getByRole('button', { name: 'Set priority' }).click()
  await page.getByText('Priority set.').waitFor(SOON)
  await magnus.close()
})

test('a change after approval makes it void: the officer sees old and new side by side, and posted copies are superseded', async () => {
  const number = await scenes.draft({
    segment: 'SG-10',
    supply: 'HX-2',
    from: at('2026-11-11 06:00'),
    hours: 60,
    holder: 'nerys',
    deputy: 'odalys',
  })
  await scenes.act('bram', number, 'request')
  await scenes.act('ione', number, 'approve')

  const bram = await scenes.open(browser, 'bram')
  await bram.goto(`/permits/${number}`)
  await mainOf(bram.page).getByRole('link', { name: 'Change the terms' }).click()
  await bram.page.getByLabel('Highest temperature, °C').fill('160')
  await bram.page.getByLabel('Reason', { exact: true }).fill('The wall has never been above 150 °C.')
  await bram.page.getByRole('button', { name: 'Save the change; the approval ends' }).click()
  await bram.page.waitForURL((url) => url.pathname === `/permits/${number}`, SOON)
  expect(await scenes.permit(number)).toMatchObject({
    state: 'requested',
    approvedBy: null,
    approvedVersion: 1,
  })
  await bram.close()

  const ione = await scenes.open(browser, 'ione')
  await ione.goto(`/permits/${number}`)
  const changed = actForm(ione.page, 'Changed since version 1 was approved')
  const row = changed.getByRole('row').filter({ hasText: 'Highest temperature' })
  expect(await row.getByRole('cell').allInnerTexts()).toEqual(['150 °C', '160 °C'])
  await changed
    .getByText('Copies of it that are posted at the site are superseded.', { exact: false })
    .waitFor()
  await ione.goto(`/permits/${number}/print`)
  expect(await mainOf(ione.page).innerText()).toMatch(
    /copies of the earlier one are superseded, take them down/,
  )
  await ione.close()
})

test('an administrator who makes herself safety officer waits for a second person and a day, and approves nothing', async () => {
  const juniper = await scenes.open(browser, 'juniper')
  const { page } = juniper
  await juniper.goto(`/people/${PERSON_ID.juniper}`)
  const give = actForm(page, 'Give a role')
  await give.getByLabel('Role', { exact: true }).selectOption('safety-officer')
  await give.getByLabel('Reason').fill('Both officers are away next week')
  await give.getByRole('button', { name: 'Give the role' }).click()
  const grant = page.getByRole('row').filter({ hasText: 'Both officers are away next week' })
  await grant.waitFor(SOON)
  expect(await grant.innerText()).toContain('waits for a second person')
  await juniper.goto('/people/waiting')
  await page.getByText('You asked for this yourself; another person decides.').waitFor()
  await refusedApproval(page)

  const magnus = await scenes.open(browser, 'magnus')
  await magnus.goto('/people/waiting')
  const waiting = actForm(magnus.page, 'Juniper Vance-Alder: Safety officer')
  await waiting.getByLabel('Reason').fill('Agreed with Ione')
  await waiting.getByRole('button', { name: 'Confirm the role' }).click()
  await magnus.page.getByText('Nothing waits.').waitFor(SOON)
  await magnus.close()

  await refusedApproval(page)
  await juniper.goto(`/people/record?person=${PERSON_ID.juniper}`)
  const lines = page.getByRole('row')
  expect(await lines.filter({ hasText: 'Both officers are away next week' }).count()).toBe(1)
  expect(await lines.filter({ hasText: 'permit attempt blocked' }).count()).toBe(2)

  await juniper.goto(`/people/${PERSON_ID.juniper}`)
  const take = actForm(page, 'Take a role away')
  await take.getByLabel('Role', { exact: true }).selectOption({ label: 'Safety officer, to come' })
  await take.getByLabel('Reason').fill('One of them comes back after all')
  await take.getByRole('button', { name: 'Take it away now' }).click()
  await page.getByText('One of them comes back after all').waitFor(SOON)
  await juniper.close()
})

/** Juniper sends an approval from her own page: none is offered to her. */
async function refusedApproval(page: Page): Promise<void> {
  await page.goto('/permits/HSP-2026-032')
  expect(await mainOf(page).getByRole('link', { name: 'Approve', exact: true }).count()).toBe(0)
  const { revision } = await scenes.permit('HSP-2026-032')
  const answer = await post(page, '/permits/HSP-2026-032', {
    act: 'approve',
    revision: String(revision),
    password: passwordOf('juniper'),
  })
  expect(answer.status).toBe(403)
  expect((await scenes.permit('HSP-2026-032')).revision).toBe(revision)
}
