import { expect, test } from 'vitest'
import { safePath } from '#app/domain/safe-path.ts'

test.each([
  ['/segments/SG-11', '/segments/SG-11'],
  ['/logbook?kind=valve', '/logbook?kind=valve'],
  [null, '/'],
  ['', '/'],
  ['https://elsewhere.example/', '/'],
  ['//elsewhere.example/', '/'],
  ['/\\elsewhere.example', '/'],
  ['javascript:alert(1)', '/'],
])('%s leads to %s', (next, path) => {
  expect(safePath(next)).toBe(path)
})
