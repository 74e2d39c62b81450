import { expect, test } from 'vitest'
import { createAttemptLimit } from '#app/auth/attempt-limit.server.ts'

const T0 = new Date('2026-11-09T07:00:00.000Z')
const at = (seconds: number) => new Date(T0.getTime() + seconds * 1000)

test('as many attempts as allowed, then a refusal that says how long to wait, until the window has passed', () => {
  const limit = createAttemptLimit(2, 300_000)
  limit.begin('pim', at(0))
  limit.begin('pim', at(1))
  expect(() => limit.begin('pim', at(2))).toThrow('Wait 5 minutes')
  expect(() => limit.begin('pim', at(241))).toThrow('Wait 1 minute and')
  expect(() => limit.begin('pim', at(299.999))).toThrow('Too many wrong passwords')
  expect(() => limit.begin('pim', at(300))).not.toThrow()
})

test('refused attempts do not make the wait longer', () => {
  const limit = createAttemptLimit(1, 10_000)
  limit.begin('pim', at(0))
  for (let second = 1; second < 10; second += 1) expect(() => limit.begin('pim', at(second))).toThrow()
  expect(() => limit.begin('pim', at(10))).not.toThrow()
})

test('keys are counted apart, and a success forgets', () => {
  const limit = createAttemptLimit(1, 10_000)
  limit.begin('pim', at(0))
  limit.begin('bram', at(0))
  limit.succeed('pim')
  expect(() => limit.begin('pim', at(1))).not.toThrow()
  expect(() => limit.begin('bram', at(1))).toThrow()
})

test('ten thousand addresses tried once do not free the one that is stopped', () => {
  const limit = createAttemptLimit(1, 10_000)
  limit.begin('pim', at(0))
  for (let n = 0; n < 10_000; n += 1) limit.begin(`nobody ${n}`, at(1))
  expect(() => limit.begin('pim', at(2))).toThrow()
})
