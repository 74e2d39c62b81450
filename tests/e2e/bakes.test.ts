/** From a stubborn curve to a bake with a place, in a browser and by the keyboard alone; then the pages' width and form. */
import type { Browser, Locator, Page } from 'playwright-core'
import { afterAll, beforeAll, expect, inject, test } from 'vitest'
import { DEMO_SIGN_INS } from '#seeds/demo-sign-ins.ts'
import { expectAccessible, launchBrowser, openPage } from '#tests/support/browser.ts'
import { press, reach, type } from '#tests/support/keyboard.ts'

/** A server that is busy with other work still answers within this. */
const SOON = { timeout: 20_000 }

let browser: Browser

beforeAll(async () => {
  browser = await launchBrowser()
})

afterAll(async () => {
  await browser?.close()
})

function passwordOf(role: string): string {
  const person = DEMO_SIGN_INS.find((one) => one.role === role)
  if (person === undefined) throw new Error(`The demo has no ${role}.`)
  return person.password
}

/** Follows a link by the keyboard and waits for the page it leads to. */
async function follow(page: Page, target: Locator, to: RegExp): Promise<void> {
  await press(page, target)
  await page.waitForURL(to)
}

test('by keyboard alone: a forecast without a date, an isolation test, an option, a plan signed as ready, a place', {
  timeout: 400_000,
}, async () => {
  const view = await openPage(browser, inject('demoUrl'))
  const { page } = view
  const main = page.getByRole('main')
  await view.signIn('engineer')
  await view.goto('/forecasts')
  await follow(page, main.getByRole('link', { name: 'SG-16', exact: true }).first(), /forecasts\/SG-16$/)
  await follow(page, main.getByRole('link', { name: 'Isolation test of SG-16' }), /isolation-tests\/new/)
  await expectAccessible(page)

  await press(page, main.getByRole('button', { name: 'Record', exact: true }))
  await page.waitForURL(/isolation-tests\/\d+$/)
  await type(page, main.getByLabel('Why it is good enough'), 'Straight, valves seen shut, no helium found.')
  await reach(page, main.getByLabel(/^I accept it although/))
  await page.keyboard.press('Space')
  await type(page, main.getByLabel(/^Your password/).first(), passwordOf('engineer'))
  await page.keyboard.press('Enter')
  await follow(
    page,
    main.getByRole('link', { name: 'Options for a bake of SG-16' }),
    /options\?segments=SG-16/,
  )

  await main.getByText(/SG-16 reads \d+\.\d times what the register's hydrogen gives/).waitFor()
  await expectAccessible(page)
  const hottest = main.getByRole('row', { name: /^150 °C/ }).getByRole('link', { name: /^Choose/ })
  await follow(page, hottest, /bakes\/plans\/new/)
  expect(await main.getByLabel('Target of the cold segment, Pa').inputValue()).toBe('2e-7')
  // The option takes four weeks; a shorter soak leaves the target unmet, and the plan has to say so.
  await type(page, main.getByLabel('Soak, hours'), '168')
  await type(page, main.getByLabel('Start of heating'), '2026-11-11 20 o’clock')
  await press(page, main.getByRole('button', { name: 'Save as draft' }))
  await main.getByRole('alert').waitFor()
  expect(await main.getByLabel('Soak, hours').inputValue(), 'a refused form keeps what was typed').toBe('168')
  await type(page, main.getByLabel('Start of heating'), '2026-11-11 20:00')
  await reach(page, main.getByLabel('Supply set'))
  await page.keyboard.type('HX-3')
  await reach(page, main.getByLabel('Pumping cart'))
  await page.keyboard.type('MC-B')
  await press(page, main.getByRole('button', { name: 'Save as draft' }))
  await page.waitForURL(/bakes\/plans\/\d+$/)
  const plan = new URL(page.url()).pathname
  await main.getByText(/SG-16 now reads \d+\.\d times what the register's hydrogen gives/).waitFor()
  await main.getByText('12 steps are missing.', { exact: false }).first().waitFor()
  await expectAccessible(page)

  const ticks = main.getByRole('button', { name: /^Tick: / })
  for (let left = await ticks.count(); left > 0; left -= 1) {
    await press(page, ticks.first())
    await expect.poll(() => ticks.count(), SOON).toBe(left - 1)
  }
  await follow(page, main.getByRole('link', { name: 'Write the entry' }), /logbook\/new\?segment=SG-16/)
  await reach(page, main.getByLabel('Kind'))
  await page.keyboard.type('Leak check')
  await type(
    page,
    main.locator('textarea[name="text"]'),
    'Helium round all joints of SG-16: nothing above background.',
  )
  await type(page, main.locator('input[name="password"]'), passwordOf('engineer'))
  await page.keyboard.press('Enter')
  await page.waitForURL(/segments\/SG-16$/)
  await follow(page, page.getByRole('navigation').getByRole('link', { name: 'Bakes' }), /\/bakes$/)
  await follow(page, main.getByRole('link', { name: 'Bake of SG-16' }), new RegExp(`${plan}$`))
  await type(page, main.getByLabel('Your own password'), passwordOf('engineer'))
  await page.keyboard.press('Enter')
  await main.getByText('Ready', { exact: true }).first().waitFor()

  await follow(page, main.getByRole('link', { name: 'Schedule' }), /bakes\/schedule/)
  await type(page, main.getByLabel('Name'), 'November by keyboard')
  // Long enough for one bake after the other, whichever comes first.
  await type(page, main.getByLabel('Days'), '60')
  await press(page, main.getByRole('button', { name: 'Make a schedule' }))
  await page.waitForURL(/schedule\?id=\d+/)
  await main.getByText(/Without a place, and so not judged: .*SG-16/).waitFor()
  await press(page, main.getByRole('button', { name: 'Propose places' }))
  await main.getByText(/^proposed, made by/).waitFor({ timeout: 90_000 })
  await expectAccessible(page)

  const bar = main.getByRole('button', { name: /^SG-16: heating from/ })
  const answer = main.getByText(/^With HX-3 and MC-B, as its plan asks: SG-16/)
  const days = async (key: 'ArrowLeft' | 'ArrowRight', count: number) => {
    await reach(page, bar)
    for (let day = 0; day < count; day += 1) await page.keyboard.press(`Shift+${key}`)
  }
  await days('ArrowRight', 24)
  await expect
    .poll(() => answer.innerText(), SOON)
    .toMatch(/SG-16 on \d+ Dec \d\d:\d\d: nothing stands in the way/)
  await days('ArrowLeft', 35)
  await expect.poll(() => answer.innerText(), SOON).toMatch(/SG-16 not on \d+ \w+ at \d\d:\d\d: ./)
  await days('ArrowRight', 35)
  await expect
    .poll(() => answer.innerText(), SOON)
    .toMatch(/SG-16 on \d+ Dec \d\d:\d\d: nothing stands in the way/)
  const moved = await bar.getAttribute('aria-label')
  await reach(page, main.getByLabel(/^Pinned/))
  await page.keyboard.press('Space')
  await press(page, main.getByRole('button', { name: 'Keep this place' }))
  await page.getByText(/^SG-16 moved; /).waitFor()
  expect(await bar.getAttribute('aria-label')).toBe(`${moved}, pinned`)
  await view.close()
})

test('without a script a plan is refused with what was typed, and then made', async () => {
  const alive = await openPage(browser, inject('demoUrl'))
  await alive.signIn('engineer')
  const plain = await openPage(browser, inject('demoUrl'), {
    javaScriptEnabled: false,
    storageState: await alive.context.storageState(),
  })
  const { page } = plain
  await page.goto('/bakes/plans/new?segments=SG-06&target=3e-7&ramp=8')
  await page.getByLabel('Name of the plan').fill('Draft without a script')
  await page.getByLabel('Soak, hours').fill('long')
  await page.getByRole('button', { name: 'Save as draft' }).click()
  await page.getByRole('alert').waitFor()
  expect(await page.getByLabel('Name of the plan').inputValue()).toBe('Draft without a script')
  expect(await page.getByLabel('Soak, hours').inputValue()).toBe('long')
  expect(await page.getByLabel('Ramp, °C per hour').inputValue()).toBe('8')
  await page.getByLabel('Soak, hours').fill('48')
  await page.getByRole('button', { name: 'Save as draft' }).click()
  await page.waitForURL(/bakes\/plans\/\d+$/)
  expect(await page.getByRole('main').innerText()).toMatch(/Target\s+3\.0\s×\s10/)
  await page.getByLabel('Why it is withdrawn').fill('Only to try the form.')
  await page.getByRole('button', { name: 'Withdraw the plan' }).click()
  await page.locator('strong', { hasText: /^Withdrawn$/ }).waitFor()
  await plain.close()
  await alive.close()
})

test('those who plan nothing see the bakes and are offered no plan', async () => {
  for (const role of ['technician', 'safety-officer', 'manager'] as const) {
    const view = await openPage(browser, inject('demoUrl'))
    await view.signIn(role)
    await view.goto('/bakes/options?segments=SG-12')
    expect(await view.page.getByRole('link', { name: /^Choose/ }).count(), role).toBe(0)
    await view.goto('/bakes/schedule')
    expect(await view.page.getByRole('button', { name: 'Make a schedule' }).count(), role).toBe(0)
    await view.goto('/forecasts/SG-16')
    const test = view.page.getByRole('link', { name: 'Isolation test of SG-16' })
    expect(await test.count(), role).toBe(role === 'technician' ? 1 : 0)
    await view.close()
  }
})

const PAGES = [
  '/forecasts',
  '/forecasts/SG-16',
  '/segments/SG-16/isolation-tests/new',
  '/bakes',
  '/bakes/options?segments=SG-16',
  '/bakes/plans/new',
  '/bakes/plans/6',
  '/bakes/schedule',
  '/bakes/runs/SG-05',
]

test('no page of forecasts and bakes runs over the edge or has a grave fault, at any width', async () => {
  const view = await openPage(browser, inject('demoUrl'))
  await view.signIn('engineer')
  for (const path of PAGES) {
    // One loading a page: the sizes follow by resizing, as a tablet does when it is turned.
    await view.goto(path)
    for (const width of [1440, 820, 390]) {
      await view.page.setViewportSize({ width, height: 844 })
      await expect
        .poll(() => view.page.evaluate(() => document.documentElement.scrollWidth), {
          message: `${path} at ${width} px`,
          timeout: 5_000,
        })
        .toBeLessThanOrEqual(width)
      if (width !== 820) await expectAccessible(view.page)
    }
  }
  await view.close()
})
