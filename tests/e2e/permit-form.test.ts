/** The permit form in a browser: saved by itself, typed text that outlives a session, rows by keyboard, two people at once. */
import type { Browser } from 'playwright-core'
import { afterAll, beforeAll, expect, inject, test } from 'vitest'
import { expectAccessible, launchBrowser, openPage, type TestPage } from '#tests/support/browser.ts'

/** A server that is busy with other work still answers within this. */
const SOON = { timeout: 30_000 }

let browser: Browser

beforeAll(async () => {
  browser = await launchBrowser()
})

afterAll(async () => {
  await browser?.close()
})

/** Draws up a draft by hand, as nobody else's test touches it. @returns the address of its form */
async function newDraft(view: TestPage, segment: string): Promise<string> {
  const { page } = view
  await view.goto('/permits/new')
  const byHand = page.getByRole('region', { name: 'From a segment, by hand' })
  await byHand.getByLabel('Segment', { exact: true }).selectOption(segment)
  await byHand.getByLabel('Highest temperature, °C').fill('80')
  await byHand.getByRole('button', { name: 'Draw up the draft' }).click()
  await page.waitForURL(/\/permits\/HSP-\d{4}-\d{3}\/edit$/, SOON)
  return new URL(page.url()).pathname
}

test('is saved while it is typed, counts what is missing, and takes rows by keyboard', async () => {
  const view = await openPage(browser, inject('demoUrl'))
  const { page } = view
  await view.signIn('engineer')
  const address = await newDraft(view, 'SG-09')
  const sections = page.getByRole('navigation', { name: 'Sections of the permit' })
  const validity = sections.getByRole('link', { name: /Window and shifts/ })
  await expect.poll(() => validity.textContent(), SOON).toContain('3 missing')

  await page.getByLabel('Shifts that are covered').fill('Day crew A')
  await page.getByLabel('Window begins').fill('2026-10-24 12:00')
  await page.getByLabel('Window ends').fill('2026-10-26 12:00')
  await page.getByText('49 h of at most 240 h').waitFor()
  await page.getByText(/clocks change in between, from UTC\+02:00 to UTC\+01:00/).waitFor()
  await page.getByText(/^Saved \d\d:\d\d\.$/).waitFor(SOON)
  await expect.poll(() => validity.textContent(), SOON).toContain('complete')

  const adds = page.getByRole('button', { name: 'Add a contact' })
  await adds.focus()
  await page.keyboard.press('Enter')
  const role = page.getByLabel('Who answers')
  await expect.poll(() => role.evaluate((field) => field === document.activeElement), SOON).toBe(true)
  await page.keyboard.type('Control room')
  await page.getByText(/one field cannot be read or is not finished/).waitFor(SOON)
  await page.getByLabel('Telephone').fill('4400')
  await page.getByText(/^Saved \d\d:\d\d\.$/).waitFor(SOON)
  await expectAccessible(page)

  await view.goto(address)
  expect(await page.getByLabel('Shifts that are covered').inputValue()).toBe('Day crew A')
  expect(await role.inputValue()).toBe('Control room')
  await page.getByRole('button', { name: 'Take out contact 1' }).click()
  expect(await role.count()).toBe(0)
  await page.getByText(/^Saved \d\d:\d\d\.$/).waitFor(SOON)
  await view.close()
})

test('what cannot be read leads from the summary to its field', async () => {
  const view = await openPage(browser, inject('demoUrl'))
  const { page } = view
  await view.signIn('engineer')
  await newDraft(view, 'SG-10')
  await page.getByLabel('Highest current, A').fill('1,083')
  await page.getByRole('button', { name: 'Save and check' }).click()
  const summary = page.getByRole('alert')
  await summary.getByText('One field needs another look; nothing has been saved.').waitFor()
  await summary.getByRole('link', { name: /can be read as 1083 or as 1\.083/ }).click()
  const field = page.getByLabel('Highest current, A')
  await expect.poll(() => field.evaluate((one) => one === document.activeElement), SOON).toBe(true)
  await field.fill('1083')
  await page.getByRole('button', { name: 'Save and check' }).click()
  await page.getByText(/things are still missing for a request/).waitFor(SOON)
  await expectAccessible(page)
  await view.close()
})

test('text typed when the session has ended is kept, and offered again to the same person only', async () => {
  const view = await openPage(browser, inject('demoUrl'))
  const { page, context } = view
  await view.signIn('engineer')
  const address = await newDraft(view, 'SG-13')
  await page.getByLabel('Assembly point').fill('West portal')
  await page.getByText(/^Saved \d\d:\d\d\.$/).waitFor(SOON)

  await context.clearCookies()
  await page.getByLabel('Assembly point').fill('West portal, under the clock')
  await page.getByText('you have been signed out.', { exact: false }).waitFor(SOON)
  expect(await page.getByLabel('Assembly point').inputValue()).toBe('West portal, under the clock')

  // Somebody else at the same tablet is offered nothing.
  await view.signIn('technician')
  await view.goto(address)
  expect(await page.getByLabel('Assembly point').inputValue()).toBe('West portal')
  expect(await page.getByRole('button', { name: 'Put it back into the form' }).count()).toBe(0)
  await context.clearCookies()

  await view.signIn('engineer')
  await view.goto(address)
  await page.getByRole('button', { name: 'Put it back into the form' }).click()
  expect(await page.getByLabel('Assembly point').inputValue()).toBe('West portal, under the clock')
  await page.getByText(/^Saved \d\d:\d\d\.$/).waitFor(SOON)
  await view.goto(address)
  expect(await page.getByLabel('Assembly point').inputValue()).toBe('West portal, under the clock')
  expect(await page.getByRole('button', { name: 'Put it back into the form' }).count()).toBe(0)
  await view.close()
})

test('two people at once: the slower one keeps what was typed and is told what the other did', async () => {
  const one = await openPage(browser, inject('demoUrl'))
  const other = await openPage(browser, inject('demoUrl'))
  await one.signIn('engineer')
  const address = await newDraft(one, 'SG-07')
  await other.signIn('technician')
  await other.goto(address)
  await other.page.getByLabel('Assembly point').fill('East portal')
  await other.page.getByText(/^Saved \d\d:\d\d\.$/).waitFor(SOON)

  await one.page.getByLabel('Shifts that are covered').fill('Crew B')
  const told = one.page.getByRole('alert').filter({ hasText: 'changed since you opened it' })
  await told.waitFor(SOON)
  expect(await told.textContent()).toMatch(/Assembly point: nothing became “East portal”/)
  expect(await one.page.getByLabel('Shifts that are covered').inputValue()).toBe('Crew B')
  expect(await one.page.getByLabel('Assembly point').inputValue()).toBe('East portal')
  await one.page.getByRole('button', { name: 'Save', exact: true }).click()
  await one.page.getByText(/^Saved \d\d:\d\d\.$/).waitFor(SOON)
  await one.close()
  await other.close()
})

test('fits into a telephone, a tablet and a desk', async () => {
  const view = await openPage(browser, inject('demoUrl'))
  await view.signIn('engineer')
  for (const path of ['/permits/new', '/permits/HSP-2026-033/edit?check=1']) {
    await view.goto(path)
    for (const width of [390, 820, 1440]) {
      await view.page.setViewportSize({ width, height: 900 })
      const wider = await view.page.evaluate(() => document.documentElement.scrollWidth - window.innerWidth)
      expect(wider, `${path} at ${width} px`).toBeLessThanOrEqual(0)
      await expectAccessible(view.page)
    }
  }
  await view.close()
})

test('no field that takes the focus by Tab lies under the bar with the buttons on a telephone', async () => {
  const view = await openPage(browser, inject('demoUrl'), { viewport: { width: 390, height: 844 } })
  const { page } = view
  await view.signIn('engineer')
  await view.goto('/permits/HSP-2026-033/edit')
  await page.getByLabel('Title', { exact: true }).focus()
  const hidden: string[] = []
  let stops = 0
  for (let inBar = false; !inBar && stops < 250; stops += 1) {
    await page.keyboard.press('Tab')
    const at = await page.evaluate(() => {
      const bar = document.querySelector('[data-foot-bar]')
      const focus = document.activeElement
      const under =
        bar !== null && focus !== null && focus.getBoundingClientRect().top >= bar.getBoundingClientRect().top
      return { inBar: bar?.contains(focus) ?? true, under, name: focus?.getAttribute('name') ?? '' }
    })
    inBar = at.inBar
    if (!inBar && at.under) hidden.push(at.name)
  }
  expect(hidden).toEqual([])
  // The walk has gone through the form and ended at its bar.
  expect(stops).toBeGreaterThan(60)
  expect(stops).toBeLessThan(250)
  await view.close()
})
