/**
 * Four night files dropped on the log intake at once, one of them with a question, as a technician would do it. The
 * files are of a night long ago and are discarded in the end: the other tests look at the same demo.
 */
import type { Browser, Page } from 'playwright-core'
import { afterAll, beforeAll, expect, inject, test } from 'vitest'
import { expectAccessible, launchBrowser, openPage } from '#tests/support/browser.ts'

let browser: Browser

beforeAll(async () => {
  browser = await launchBrowser()
})

afterAll(async () => {
  await browser?.close()
})

interface NightFile {
  name: string
  text: string
}

/** A night of the east logger from a minute of 14 September 2026 on, in this unit. */
function east(name: string, minute: number, unit: string): NightFile {
  const from = Date.UTC(2026, 8, 14, 4, minute)
  const rows = Array.from(
    { length: 30 },
    (_, i) => `${from + i * 60_000},HC-09A,${(5.5 + (i % 7) / 10).toFixed(1)}e-08,${unit},OK`,
  )
  return { name, text: `epoch_ms,channel,value,unit,status\n${rows.join('\n')}\n` }
}

const FILES: NightFile[] = [
  east('NL-E_2026-09-14.csv', 0, 'Pa'),
  east('NL-E_2026-09-14_torr.csv', 30, 'Torr'),
  {
    name: 'NL-P_2026-09-14.csv',
    text: 'time,IP-01 (A),IP-02 (A)\n2026-09-14T06:02:00+02:00,1.29e-07,1.28e-07\n2026-09-14T06:07:00+02:00,1.34e-07,OFF\n',
  },
  // Its name says nothing about its logger.
  {
    name: 'night.csv',
    text: '# Temperature logger\tUnit: °C\ntime\tTH-01-01\tTH-01-02\n2026-09-14T06:02:00+02:00\t18.0\t17.7\n2026-09-14T06:07:00+02:00\t18.1\t17.8\n',
  },
]

/** Lets files fall on the form, as a drag from the desktop does. */
async function drop(page: Page, files: readonly NightFile[]): Promise<void> {
  const dataTransfer = await page.evaluateHandle((all) => {
    const transfer = new DataTransfer()
    for (const { name, text } of all) transfer.items.add(new File([text], name, { type: 'text/csv' }))
    return transfer
  }, files as NightFile[])
  const form = page.locator('form', { has: page.locator('input[type="file"]') })
  for (const kind of ['dragover', 'drop']) await form.dispatchEvent(kind, { dataTransfer })
}

async function discard(page: Page): Promise<void> {
  await page.getByLabel('Why it is not wanted').fill('sent to try the intake')
  await page.getByRole('button', { name: 'Discard', exact: true }).click()
  await page.waitForURL(/\/intake$/)
}

test('four files dropped at once are sent and read, and the one with a question can be answered', async () => {
  const view = await openPage(browser, inject('demoUrl'))
  const { page } = view
  await view.signIn('technician')
  await view.goto('/intake')
  await drop(page, FILES)
  const list = page.getByRole('list', { name: 'Chosen files' })
  const sourceOf = (name: string) => list.getByLabel(`Source of ${name}`, { exact: true })
  for (const { name } of FILES.slice(0, 3))
    expect(await sourceOf(name).inputValue()).toBe(name.slice(0, 'NL-E'.length))
  expect(await sourceOf('night.csv').inputValue()).toBe('')
  await sourceOf('night.csv').selectOption('NL-T')
  await expectAccessible(page)
  await page.getByRole('button', { name: 'Send and read 4 files' }).click()
  const received = list.getByRole('link', { name: /^Received/ })
  await expect.poll(() => received.count(), { timeout: 60_000 }).toBe(4)
  const pages = await received.evaluateAll((links) => links.map((link) => link.getAttribute('href') ?? ''))

  // What to do next stands in the list below, without opening any of them.
  const row = (name: string) =>
    page.getByRole('row').filter({ has: page.getByRole('link', { name, exact: true }) })
  await row('NL-E_2026-09-14_torr.csv').getByRole('link', { name: 'has a question' }).click()
  await page.waitForURL(/\/intake\/\d+#questions$/)
  expect(new URL(page.url()).pathname).toBe(pages[1])
  const takeIn = page.getByRole('button', { name: /^Take in/ })
  expect(await takeIn.isDisabled()).toBe(true)
  const question = page.getByLabel(/Torr/)
  await question.selectOption('Pa')
  await page.getByRole('button', { name: 'Read again with these answers' }).click()
  await page.getByRole('heading', { name: 'Questions answered' }).waitFor()
  expect(await page.getByRole('heading', { name: 'Questions', exact: true }).count()).toBe(0)
  expect(await takeIn.innerText()).toContain('30')
  expect(await takeIn.isEnabled()).toBe(true)
  expect(await page.locator('dd', { hasText: 'Pim Larkspur' }).innerText()).toContain('Pa')
  await expectAccessible(page)

  for (const address of pages) {
    await view.goto(address)
    await discard(page)
  }
  await view.close()
})

test('on a phone the list of chosen files fits', async () => {
  const view = await openPage(browser, inject('demoUrl'), { viewport: { width: 390, height: 844 } })
  const { page } = view
  await view.signIn('technician')
  await view.goto('/intake')
  await drop(page, FILES)
  await page.getByRole('list', { name: 'Chosen files' }).waitFor()
  const overflow = await page.evaluate(
    () => document.documentElement.scrollWidth - document.documentElement.clientWidth,
  )
  expect(overflow).toBe(0)
  await view.close()
})

test('the bar shows how much of a slow file has been sent, and stopping leaves nothing behind', async () => {
  const view = await openPage(browser, inject('demoUrl'))
  const { page, context } = view
  await view.signIn('technician')
  await view.goto('/intake')
  // A line as in a tunnel, so that a file of 2 MiB is on its way for a while.
  const network = await context.newCDPSession(page)
  await network.send('Network.enable')
  await network.send('Network.emulateNetworkConditions', {
    offline: false,
    latency: 20,
    downloadThroughput: 1024 * 1024,
    uploadThroughput: 200 * 1024,
  })
  const name = 'NL-E_2026-09-15.csv'
  await drop(page, [{ name, text: `${east(name, 0, 'Pa').text}${'# filler\n'.repeat(230_000)}` }])
  await page.getByRole('button', { name: 'Send and read' }).click()
  await page.getByText(/^(?:[1-9]|[1-9]\d) % of .* sent$/).waitFor({ timeout: 60_000 })
  await page.getByRole('button', { name: 'Stop' }).click()
  await page.getByText('Stopped. Nothing of this file has been saved.').waitFor()
  await view.goto('/intake')
  expect(await page.getByRole('link', { name, exact: true }).count()).toBe(0)
  await view.close()
})

test('a large file whose connection breaks goes on by itself and is there once', async () => {
  const view = await openPage(browser, inject('demoUrl'))
  const { page } = view
  await view.signIn('technician')
  await view.goto('/intake')
  let requests = 0
  await page.route('**/intake/uploads/*', (route) => {
    if (route.request().method() !== 'PATCH') return route.continue()
    requests += 1
    return requests === 2 ? route.abort('connectionreset') : route.continue()
  })
  const name = 'NL-E_2026-09-16.csv'
  const remarks = `# ${'remark '.repeat(60)}\n`.repeat(25_000)
  await drop(page, [{ name, text: `${east(name, 0, 'Pa').text}${remarks}` }])
  await page.getByRole('button', { name: 'Send and read' }).click()
  await page.getByText(/^Broken off at \d+ %, going on/).waitFor({ timeout: 60_000 })
  await page.waitForURL(/\/intake\/\d+$/, { timeout: 60_000 })
  const address = new URL(page.url()).pathname
  // The one that broke, and the two that carry the file.
  expect(requests).toBe(3)
  await view.goto('/intake')
  const links = page.getByRole('link', { name, exact: true })
  const addresses = await links.evaluateAll((all) => all.map((link) => link.getAttribute('href') ?? ''))
  expect([...new Set(addresses)]).toEqual([address])
  expect(await page.getByRole('list', { name: 'Files that broke off' }).count()).toBe(0)
  await view.goto(address)
  await discard(page)
  await view.close()
})
