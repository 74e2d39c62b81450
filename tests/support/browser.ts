/** Chromium for browser tests, from the system's packages, and what nearly every such test does with a page. */
import { readFile } from 'node:fs/promises'
import { createRequire } from 'node:module'
import type axe from 'axe-core'
import {
  type Browser,
  type BrowserContext,
  type BrowserContextOptions,
  chromium,
  type Page,
} from 'playwright-core'
import { expect } from 'vitest'
import { DEMO_SIGN_INS } from '#seeds/demo-sign-ins.ts'

const CHROMIUM = process.env.CHROMIUM_PATH ?? '/usr/bin/chromium'
const axeSource = createRequire(import.meta.url).resolve('axe-core/axe.min.js')

export type DemoRole = (typeof DEMO_SIGN_INS)[number]['role']

/** Starts Chromium without a window. The caller closes it. */
export async function launchBrowser(): Promise<Browser> {
  return await chromium.launch({
    executablePath: CHROMIUM,
    // Inside a container, as root, there is neither a sandbox nor much shared memory.
    args: ['--no-sandbox', '--disable-dev-shm-usage'],
  })
}

export interface TestPage {
  page: Page
  context: BrowserContext
  /** Faults in the page so far: uncaught errors and what React and the browser complain about. */
  faults: string[]
  /** Opens a path and waits until the page is alive. */
  goto(path: string): Promise<void>
  /** Signs in as the demo's person of that role. */
  signIn(role: DemoRole): Promise<void>
  /** Fails when the page had a fault; then closes it. Call it at the end of each test. */
  close(): Promise<void>
}

/** A page of its own, with its own cookies. Sizes: `{ viewport: { width: 390, height: 844 } }`. */
export async function openPage(
  browser: Browser,
  baseURL: string,
  options: BrowserContextOptions = {},
): Promise<TestPage> {
  const context = await browser.newContext({
    baseURL,
    viewport: { width: 1440, height: 900 },
    locale: 'en-GB',
    timezoneId: 'Europe/Berlin',
    reducedMotion: 'reduce',
    ...options,
  })
  const page = await context.newPage()
  page.setDefaultTimeout(15_000)
  const faults: string[] = []
  page.on('pageerror', (error) => faults.push(`Uncaught: ${error.message}`))
  page.on('console', (message) => {
    // A 4xx that a test asks for is logged by the browser as well; only what the code says counts.
    if (message.type() === 'error' && !message.text().startsWith('Failed to load resource')) {
      faults.push(`Console: ${message.text()}`)
    }
  })
  async function goto(path: string): Promise<void> {
    await page.goto(path)
    await hydrated(page)
  }
  return {
    page,
    context,
    faults,
    goto,
    async signIn(role) {
      const person = DEMO_SIGN_INS.find((one) => one.role === role)
      if (person === undefined) throw new Error(`The demo has no ${role}.`)
      await goto('/sign-in')
      // By type: the demo's one-press sign-ins hold hidden fields of the same names.
      await page.locator('input[type="email"]').fill(person.email)
      await page.locator('input[type="password"]').fill(person.password)
      await page.locator('input[type="password"]').press('Enter')
      await page.waitForURL((url) => url.pathname !== '/sign-in')
      await hydrated(page)
    },
    async close() {
      await context.close()
      expect(faults).toEqual([])
    },
  }
}

/** Waits until the page's code has taken over what the server sent. */
async function hydrated(page: Page): Promise<void> {
  await page.locator('html[data-hydrated]').waitFor({ state: 'attached' })
}

/** Fails when axe finds a serious or critical fault on the page as it is now. */
export async function expectAccessible(page: Page): Promise<void> {
  // Through the protocol: the page's own policy would refuse a script tag.
  if (!(await page.evaluate(() => 'axe' in globalThis))) await page.evaluate(await readAxe())
  const violations = await page.evaluate(async () => {
    const results = await (globalThis as typeof globalThis & { axe: typeof axe }).axe.run(document, {
      // What passes is only counted: listing every element of a long table takes longer than judging it.
      resultTypes: ['violations'],
      runOnly: ['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa', 'best-practice'],
    })
    return results.violations
  })
  const grave = violations
    .filter(({ impact }) => impact === 'serious' || impact === 'critical')
    .map(
      ({ id, help, nodes }) => `${id}: ${help}: ${nodes.map(({ html }) => html.slice(0, 160)).join(' | ')}`,
    )
  expect(grave, `${page.url()} at ${page.viewportSize()?.width} px`).toEqual([])
}

let axeText: string | undefined

async function readAxe(): Promise<string> {
  axeText ??= await readFile(axeSource, 'utf8')
  return axeText
}
