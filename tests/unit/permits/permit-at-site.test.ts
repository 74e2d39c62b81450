import { expect, test } from 'vitest'
import { type AtSite, nextAtSite, type SitePlace } from '#app/domain/permit-at-site.ts'
import { PERMIT_STATES } from '#app/domain/permit-words.ts'

const site = (change: Partial<AtSite>): AtSite => ({
  state: 'approved',
  points: 6,
  held: 6,
  tests: 3,
  good: 3,
  checked: true,
  locksOut: 6,
  until: '',
  ...change,
})

test.each<[Partial<AtSite>, SitePlace, RegExp]>([
  [{ held: 5 }, 'locks', /verify 1 isolation point\./],
  [{ held: 0, good: 0, checked: false }, 'locks', /6 isolation points/],
  [{ good: 1, checked: false }, 'tests', /^2 tests/],
  [{ checked: false }, 'check', /barriers and signs/],
  [{}, 'permit', /holder to accept/],
  [{ state: 'requested', locksOut: 0 }, 'permit', /No locks yet/],
  [{ state: 'requested' }, 'permit', /Locks stay on/],
  [{ state: 'issued', until: '18:00' }, 'permit', /Live until 18:00/],
  [{ state: 'issued', good: 2 }, 'tests', /1 test due/],
  [{ state: 'suspended', checked: false }, 'check', /stopped/],
  [{ state: 'suspended' }, 'permit', /Only an officer/],
  [{ state: 'expired' }, 'heating', /heating is off/],
  [{ state: 'handed-back', locksOut: 1 }, 'locks', /1 lock hangs still/],
  [{ state: 'handed-back', locksOut: 0 }, 'permit', /inspects/],
  [{ state: 'lapsed', locksOut: 2 }, 'locks', /It is over, and locks hang still/],
  [{ state: 'cancelled', locksOut: 0 }, 'none', /It is over/],
])('%o leads to %s', (change, place, text) => {
  const next = nextAtSite(site(change))
  expect(next.place).toBe(place)
  expect(next.text).toMatch(text)
})

test('in no state does it say that work may begin', () => {
  for (const state of PERMIT_STATES) {
    expect(nextAtSite(site({ state, locksOut: 0 })).text).not.toMatch(/\b(safe|may begin|protected)\b/i)
  }
})
