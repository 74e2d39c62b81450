import { beforeAll, expect, test, vi } from 'vitest'

interface Lock {
  packages: Record<string, { version?: string; optional?: boolean }>
}
let matchesLock: (lock: Lock, installed: Lock) => boolean

beforeAll(async () => {
  ;({ matchesLock } = await vi.importActual<{ matchesLock: typeof matchesLock }>('#app/cli/packages.mjs'))
})

const lock = {
  packages: {
    '': { version: '0.1.0' },
    'node_modules/zod': { version: '4.6.7' },
    'node_modules/only-on-another-system': { version: '1.0.0', optional: true },
  },
}

test('what npm installed matches when every package has the locked version', () => {
  expect(matchesLock(lock, { packages: { 'node_modules/zod': { version: '4.6.7' } } })).toBe(true)
})

test('another version does not match', () => {
  expect(matchesLock(lock, { packages: { 'node_modules/zod': { version: '4.6.6' } } })).toBe(false)
})

test('a missing package does not match', () => {
  expect(matchesLock(lock, { packages: {} })).toBe(false)
})

test('an optional package of the wrong version does not match', () => {
  const installed = {
    packages: {
      'node_modules/zod': { version: '4.6.7' },
      'node_modules/only-on-another-system': { version: '0.9.0' },
    },
  }
  expect(matchesLock(lock, installed)).toBe(false)
})
