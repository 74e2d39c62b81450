/** No page of the product has a serious or critical fault by axe, at a desk, on a tablet and on a phone; none scrolls sideways. */
import type { Browser } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, inject, test } from 'vitest'
import { type DemoRole, expectAccessible, launchBrowser, openPage } from '#tests/support/browser.ts'

let browser: Browser

beforeAll(async () => {
  browser = await launchBrowser()
})

afterAll(async () => {
  await browser?.close()
})

const TABLET = 820
const WIDTHS = [1440, TABLET, 390]

const PAGES: { role: DemoRole; paths: string[] }[] = [
  {
    role: 'engineer',
    paths: [
      '/',
      '/?show=unknown',
      '/segments/SG-11',
      '/segments/SG-05',
      '/segments/SG-14',
      '/segments/SG-16',
      '/segments/SG-11/state',
      '/intake',
      '/intake/1',
      '/logbook',
      '/logbook/new?segment=SG-11',
      '/logbook/1',
      '/register',
      '/register/segments',
      '/register/segments/SG-11',
      '/register/positions/HC-11B',
      '/register/instruments',
      '/register/channels',
      '/register/pumps',
      '/register/pumps/new',
      '/register/valves',
      '/register/circuits',
      '/register/sources/NL-W',
      '/register/limits',
      '/account',
      '/people',
    ],
  },
  {
    role: 'administrator',
    paths: ['/people', '/people/new', '/people/1', '/people/waiting', '/people/record', '/clock'],
  },
]

test.each(WIDTHS)('the sign-in page at %d px', async (width) => {
  const view = await openPage(browser, inject('demoUrl'), { viewport: { width, height: 900 } })
  await view.goto('/sign-in')
  await expectAccessible(view.page)
  await view.close()
})

describe.each(PAGES)('pages of the $role', ({ role, paths }) => {
  // One loading a page: the sizes follow by resizing, as a tablet does when it is turned.
  test('at every width', async () => {
    const view = await openPage(browser, inject('demoUrl'))
    await view.signIn(role)
    for (const path of paths) {
      await view.goto(path)
      for (const width of WIDTHS) {
        await view.page.setViewportSize({ width, height: 900 })
        // Between desk and phone nothing changes but the room there is.
        if (width !== TABLET) await expectAccessible(view.page)
        // A chart follows its new width a frame later.
        const sideways = () =>
          view.page.evaluate(
            () => document.documentElement.scrollWidth - document.documentElement.clientWidth,
          )
        await expect
          .poll(sideways, { message: `${path} scrolls sideways at ${width} px`, timeout: 5_000 })
          .toBeLessThanOrEqual(0)
      }
    }
    await view.close()
  })
})
