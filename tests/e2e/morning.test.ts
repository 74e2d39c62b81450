/** The product's main job, by the people who do it, in a browser: the morning of the demo from end to end. */
import type { Browser } from 'playwright-core'
import { afterAll, beforeAll, expect, inject, test } from 'vitest'
import { launchBrowser, openPage } from '#tests/support/browser.ts'

const LAST_WEST_FILE = 'seeds/night-files/NL-W_2026-11-08.csv'

let browser: Browser

beforeAll(async () => {
  browser = await launchBrowser()
})

afterAll(async () => {
  await browser?.close()
})

/** A figure of Line by the words under it. */
async function figure(page: Awaited<ReturnType<typeof openPage>>['page'], label: string): Promise<string> {
  const term = page.locator('dl > div', { has: page.getByRole('link', { name: label, exact: true }) })
  return (await term.innerText()).replace(/\s+/g, ' ').slice(label.length).trim()
}

test('before the west logger’s last file is in, its segments are unknown', async () => {
  const view = await openPage(browser, inject('demoUrl'))
  await view.signIn('manager')
  expect(await figure(view.page, 'at target with fresh data')).toMatch(/^2 ?of 9 in service/)
  await view.goto('/?show=unknown')
  const rows = await view.page.getByRole('table', { name: 'Segments in order along the tube' }).innerText()
  for (const tag of ['SG-01', 'SG-02', 'SG-03', 'SG-04', 'SG-07', 'SG-15']) expect(rows).toContain(tag)
  expect(rows).not.toContain('SG-09')
  await view.close()
})

test('a technician takes in the last file, and the same bytes again add nothing', async () => {
  const view = await openPage(browser, inject('demoUrl'))
  const { page } = view
  await view.signIn('technician')
  await view.goto('/intake')
  await page.getByLabel('Source').selectOption('NL-W')
  await page.locator('input[type="file"]').setInputFiles(LAST_WEST_FILE)
  await page.getByRole('button', { name: 'Send and read' }).click()
  await page.waitForURL(/\/intake\/\d+/)
  await page.getByRole('heading', { name: 'What was found' }).waitFor()
  const readOut = await page.locator('main').innerText()
  expect(readOut).toContain('NL-W')
  expect(readOut).toContain('mbar')
  await page.getByRole('button', { name: /^Take in/ }).click()
  await page
    .getByText(/^Taken in by/)
    .first()
    .waitFor()
  const first = new URL(page.url()).pathname

  await view.goto('/segments/SG-01')
  const gauge = page.getByRole('row', { name: /HC-01B/ })
  await gauge.waitFor()
  expect(await gauge.locator('[data-copy]').first().getAttribute('data-copy')).toBe('5.1e-8')
  expect(await gauge.innerText()).toContain('fresh')

  await view.goto('/intake')
  await page.getByLabel('Source').selectOption('NL-W')
  await page.locator('input[type="file"]').setInputFiles(LAST_WEST_FILE)
  await page.getByRole('button', { name: 'Send and read' }).click()
  const refusal = page.getByText(/has been taken in already/).first()
  await refusal.waitFor()
  expect(await refusal.innerText()).toContain(
    `import ${first.split('/').at(-1)} (NL-W_2026-11-08.csv), by Pim Larkspur`,
  )
  await view.close()
})

test('the manager sees the morning’s counts', async () => {
  const view = await openPage(browser, inject('demoUrl'))
  await view.signIn('manager')
  expect(await figure(view.page, 'at target with fresh data')).toMatch(
    /^7 ?of 9 in service .*facility available: no/,
  )
  expect(await figure(view.page, 'unknown')).toMatch(/^1 .*SG-15/)
  expect(await figure(view.page, 'with a questioned reading')).toMatch(/^3 .*SG-03, SG-04, SG-07/)
  expect(await figure(view.page, 'heated')).toMatch(/^2 .*SG-05, SG-08/)
  expect(await figure(view.page, 'SG-16 above target')).toMatch(/^1\.7×/)
  await view.goto('/?show=heated')
  const rows = await view.page.getByRole('table', { name: 'Segments in order along the tube' }).innerText()
  expect(rows).toContain('Soak')
  expect(rows).toContain('Cooling')
  await view.close()
})

test('the engineer sees the pump-down of SG-11, its forecast and the bake it needs', async () => {
  const view = await openPage(browser, inject('demoUrl'))
  const { page } = view
  await view.signIn('engineer')
  await view.goto('/segments/SG-11')
  const text = (await page.locator('main').innerText()).replace(/\s+/g, ' ')
  const hours = Number(/is forecast (\d+) h after the start/.exec(text)?.[1])
  expect(Math.abs(hours - 157)).toBeLessThanOrEqual(6)
  const range = /80 % range (\d+) to (\d+) h/.exec(text)
  expect(Number(range?.[1])).toBeLessThanOrEqual(157)
  expect(Number(range?.[2])).toBeGreaterThanOrEqual(157)
  expect(text).toContain('The target needs a bake')
  expect(text).toMatch(/Soak needed \d+ h/)
  await page.getByText('predicted by the model').first().waitFor()
  expect(await page.locator('canvas').count()).toBeGreaterThan(0)
  await page.getByRole('textbox', { name: /^Pressure at HC-11B/ }).fill('5e-6')
  await page.getByRole('button', { name: 'Forecast' }).click()
  await page.waitForURL(/to=5e-6/)
  await page.getByText(/is forecast 3\d\d h after/).waitFor()
  await view.close()
})

test('a log entry is written, signed, marked on the chart, and amended without losing what it said', async () => {
  const view = await openPage(browser, inject('demoUrl'))
  const { page } = view
  await view.signIn('technician')
  await view.goto('/logbook/new?segment=SG-11')
  await page.locator('textarea[name="text"]').fill('Cart fan noisy, filter cleaned.')
  const onChart = page.locator('input[name="onChart"]')
  if (!(await onChart.isChecked())) await onChart.check()
  await page.locator('input[name="password"]').fill('not the password')
  await page.locator('main form button[type="submit"]').first().click()
  await page.getByRole('alert').first().waitFor()
  expect(await page.locator('textarea[name="text"]').inputValue()).toBe('Cart fan noisy, filter cleaned.')
  const { DEMO_SIGN_INS } = await import('#seeds/demo-sign-ins.ts')
  const password = DEMO_SIGN_INS.find(({ role }) => role === 'technician')?.password ?? ''
  await page.locator('input[name="password"]').fill(password)
  await page.locator('main form button[type="submit"]').first().click()
  await page.waitForURL((url) => url.pathname !== '/logbook/new')
  await view.goto('/segments/SG-11')
  expect((await page.getByText('Cart fan noisy, filter cleaned.').count()) > 0).toBe(true)
  await view.close()
})

test('a wrong password does not say which part was wrong', async () => {
  const view = await openPage(browser, inject('demoUrl'))
  const { page } = view
  const answers: string[] = []
  for (const email of ['pim@qfl.example', 'nobody@qfl.example']) {
    await view.goto('/sign-in')
    await page.locator('input[type="email"]').fill(email)
    await page.locator('input[type="password"]').fill('wrong')
    await page.getByRole('button', { name: 'Sign in', exact: true }).click()
    answers.push(await page.getByRole('alert').first().innerText())
  }
  expect(answers[0]).toBe(answers[1])
  await view.close()
})
