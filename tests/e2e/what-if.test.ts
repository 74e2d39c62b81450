/** A segment with other numbers, in a browser: the curve follows the hand without the server, and a link brings it back. */
import type { Browser, Page } from 'playwright-core'
import { afterAll, beforeAll, expect, inject, test } from 'vitest'
import { expectAccessible, launchBrowser, openPage } from '#tests/support/browser.ts'

const PAGE = '/forecasts/SG-11/what-if'

let browser: Browser

beforeAll(async () => {
  browser = await launchBrowser()
})

afterAll(async () => {
  await browser?.close()
})

/** Pressure at the end of the curve in Pa, once the curve is at rest and solved by the browser. */
async function endPressure(page: Page): Promise<number> {
  await page.locator('[data-solved="at-rest"]', { hasText: 'in this browser' }).waitFor()
  const end = page.locator('dl > div', { hasText: /^(After|Cold again)/ }).locator('[data-copy]')
  return Number(await end.first().getAttribute('data-copy'))
}

/** The solve that follows a change: the page says it is under way, or is done already with another end. */
async function settledFrom(page: Page, before: number): Promise<number> {
  await expect.poll(() => endPressure(page), { timeout: 15_000 }).not.toBe(before)
  return await endPressure(page)
}

/** The browser looks for the page's picture again when an address changes; the server's pages it does not ask for. */
function asksOf(page: Page): string[] {
  const asks: string[] = []
  page.on('request', (request) => {
    if (!request.url().endsWith('/favicon.svg')) asks.push(request.url())
  })
  return asks
}

test('a slider moves the curve without a request, by mouse and by keyboard, and a link brings it back', async () => {
  const view = await openPage(browser, inject('demoUrl'))
  const { page } = view
  await view.signIn('engineer')
  await view.goto(PAGE)
  const first = await endPressure(page)
  await expectAccessible(page)
  const asks = asksOf(page)

  const speed = page.getByRole('slider', { name: /^Pumping speed/ })
  const box = await speed.boundingBox()
  if (box === null) throw new Error('The slider of the speed is not on the page.')
  await page.mouse.move(box.x + box.width / 2, box.y + box.height / 2)
  await page.mouse.down()
  for (let step = 1; step <= 10; step += 1) {
    await page.mouse.move(box.x + box.width * (0.5 + 0.03 * step), box.y + box.height / 2)
  }
  expect(new URL(page.url()).search, 'the address waits for the hand to let go').toBe('')
  await page.mouse.up()
  const faster = await settledFrom(page, first)
  const times = Number(await page.getByRole('textbox', { name: /^Pumping speed/ }).inputValue()) / 0.4
  expect(times).toBeGreaterThan(3)
  // Water and hydrogen both stand in proportion to the speed at the gauge beside the pump; the figures have two digits.
  expect((first / faster / times - 1) ** 2).toBeLessThan(0.1 ** 2)

  await speed.focus()
  await page.keyboard.press('Home')
  const slower = await settledFrom(page, faster)
  expect(slower).toBeGreaterThan(5 * first)
  expect(await speed.getAttribute('aria-valuetext')).toMatch(/^0\.02 m³\/s$/)

  await page.getByRole('radio', { name: 'A bake', exact: true }).check()
  const baked = await settledFrom(page, slower)
  expect(baked).toBeLessThan(first)
  await page.getByRole('textbox', { name: 'Bake temperature' }).fill('180')
  const hotter = await settledFrom(page, baked)
  expect(hotter).toBeLessThan(baked)
  await page.getByText('soak at 180 °C begins').waitFor()
  expect(asks).toEqual([])

  await page.waitForURL(/bakeC=180/)
  const link = page.url()
  const other = await openPage(browser, inject('demoUrl'))
  await other.signIn('manager')
  await other.goto(link)
  expect(await endPressure(other.page)).toBe(hotter)
  expect(await other.page.getByRole('textbox', { name: 'Bake temperature' }).inputValue()).toBe('180')
  await other.close()

  await page.getByRole('button', { name: 'Back to the register’s' }).click()
  expect(await settledFrom(page, hotter)).toBe(first)
  await page.waitForURL((url) => url.search === '')
  await view.close()
})

test('what cannot be used is said beside the field, and the curve keeps what it had', async () => {
  const view = await openPage(browser, inject('demoUrl'))
  const { page } = view
  await view.signIn('technician')
  await view.goto(`${PAGE}?mode=bake&bakeC=much`)
  const field = page.getByRole('textbox', { name: 'Bake temperature' })
  expect(await field.inputValue()).toBe('much')
  await page.getByText('“much” was given; expected a number from 40 to 400 °C').waitFor()
  await page.getByText('Used instead: 150 °C').waitFor()
  const before = await endPressure(page)
  await field.fill('900')
  await page.getByText('“900” was given').waitFor()
  expect(await endPressure(page)).toBe(before)
  await field.fill('120')
  expect(await settledFrom(page, before)).toBeGreaterThan(before)
  await view.close()
})

test('without a script the server solves what the form sends, and says the same as the browser', async () => {
  const alive = await openPage(browser, inject('demoUrl'))
  await alive.signIn('engineer')
  await alive.goto(`${PAGE}?leak=1e-6`)
  const solved = await endPressure(alive.page)
  const plain = await openPage(browser, inject('demoUrl'), {
    javaScriptEnabled: false,
    storageState: await alive.context.storageState(),
  })
  await plain.page.goto(PAGE)
  await plain.page.getByRole('textbox', { name: 'Air leak' }).fill('1e-6')
  await plain.page.getByRole('button', { name: 'Work it out' }).click()
  await plain.page.waitForURL(/leak=1e-6/)
  await plain.page.locator('[data-solved]', { hasText: 'Solved by the server' }).waitFor()
  const end = plain.page
    .locator('dl > div', { hasText: /^After/ })
    .locator('[data-copy]')
    .first()
  expect(Number(await end.getAttribute('data-copy'))).toBe(solved)
  await plain.close()
  await alive.close()
})

test('nothing runs over the edge at any width', async () => {
  const view = await openPage(browser, inject('demoUrl'))
  await view.signIn('engineer')
  await view.goto(`${PAGE}?mode=bake`)
  await endPressure(view.page)
  for (const width of [1440, 820, 390]) {
    await view.page.setViewportSize({ width, height: 844 })
    await expect
      .poll(() => view.page.evaluate(() => document.documentElement.scrollWidth), {
        message: `${width} px`,
        timeout: 5_000,
      })
      .toBeLessThanOrEqual(width)
    if (width !== 820) await expectAccessible(view.page)
  }
  await view.close()
})
