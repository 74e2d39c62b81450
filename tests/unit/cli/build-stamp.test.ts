import { mkdirSync, mkdtempSync, renameSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterEach, beforeAll, beforeEach, expect, test, vi } from 'vitest'

let hashSources: (root: string) => string
let root: string

beforeAll(async () => {
  ;({ hashSources } = await vi.importActual<{ hashSources: typeof hashSources }>('#app/cli/build-stamp.mjs'))
})
beforeEach(() => {
  root = mkdtempSync(join(tmpdir(), 'ebbline-build-'))
  mkdirSync(join(root, 'app', 'routes'), { recursive: true })
  writeFileSync(join(root, 'app', 'routes', 'line.tsx'), 'one')
  writeFileSync(join(root, 'package-lock.json'), '{}')
})
afterEach(() => rmSync(root, { recursive: true }))

test('the same sources have the same hash', () => {
  expect(hashSources(root)).toBe(hashSources(root))
})

test.each<[string, () => void]>([
  ['a changed file', () => writeFileSync(join(root, 'app', 'routes', 'line.tsx'), 'two')],
  ['a new file', () => writeFileSync(join(root, 'app', 'app.css'), '')],
  ['a moved file', () => renameSync(join(root, 'app', 'routes', 'line.tsx'), join(root, 'app', 'line.tsx'))],
  ['other packages', () => writeFileSync(join(root, 'package-lock.json'), '{"lockfileVersion":3}')],
  [
    'a first public file',
    () => {
      mkdirSync(join(root, 'public'))
      writeFileSync(join(root, 'public', 'favicon.svg'), '<svg/>')
    },
  ],
])('%s makes the build stale', (_what, change) => {
  const before = hashSources(root)
  change()
  expect(hashSources(root)).not.toBe(before)
})

test('what the build is not made from does not count', () => {
  const before = hashSources(root)
  mkdirSync(join(root, 'data'))
  writeFileSync(join(root, 'data', 'session-secret'), 'x')
  expect(hashSources(root)).toBe(before)
})
