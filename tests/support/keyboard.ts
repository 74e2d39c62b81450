/** A page used by the keyboard alone: a thing is reached by Tab, pressed by Enter, and typed into. */
import type { Locator, Page } from 'playwright-core'

/** No page here has more places for the focus; more presses of Tab mean that one cannot be reached. */
const MOST_STOPS = 250

/** Presses Tab until the element has the focus. A keyboard trap, or what takes no focus, ends it with an error. */
export async function reach(page: Page, target: Locator): Promise<void> {
  await target.waitFor()
  const unwatched = await target.evaluate(stopsBefore)
  // Each look at the focus takes as long as a press: the first part of the way goes without.
  for (let stop = 0; stop < unwatched; stop += 1) await page.keyboard.press('Tab')
  for (let stop = unwatched; stop < MOST_STOPS; stop += 1) {
    if (await target.evaluate((element) => element === document.activeElement)) return
    await page.keyboard.press('Tab')
  }
  const held = await page.evaluate(() => document.activeElement?.outerHTML.slice(0, 200))
  throw new Error(`${target} was not reached by Tab on ${page.url()}; the focus is at ${held}`)
}

/** Runs in the page: fewer presses of Tab than it takes from where the focus is. A radio group or a closed part only lowers it. */
function stopsBefore(target: Element): number {
  const stops = [
    ...document.querySelectorAll<HTMLElement>('a[href], button, input, select, textarea, [tabindex]'),
  ].filter((element) => element.tabIndex >= 0 && element.checkVisibility() && !element.matches(':disabled'))
  const groups = new Set<string>()
  const counted = stops.filter((element) => {
    if (!(element instanceof HTMLInputElement) || element.type !== 'radio') return true
    const seen = groups.has(element.name)
    groups.add(element.name)
    return !seen
  })
  const from = document.activeElement === null ? -1 : counted.indexOf(document.activeElement as HTMLElement)
  return Math.max(0, counted.indexOf(target as HTMLElement) - Math.max(from, 0) - 5)
}

export async function press(page: Page, target: Locator): Promise<void> {
  await reach(page, target)
  await page.keyboard.press('Enter')
}

export async function type(page: Page, target: Locator, text: string): Promise<void> {
  await reach(page, target)
  await page.keyboard.press('ControlOrMeta+A')
  await page.keyboard.type(text)
}
