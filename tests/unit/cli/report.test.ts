/** What a broken test run counts as: the closing line of `npm test` must never be kinder than the run was. */
import { beforeAll, describe, expect, test, vi } from 'vitest'

interface Outcome {
  passed: number
  failed: number
  skipped: number
  notes: string[]
}
interface End {
  code: number | null
  signal?: string
}

let outcomeOf: (report: unknown, end: End) => Outcome
let outcomeWords: (outcome: Outcome) => string

beforeAll(async () => {
  // The start and test commands are plain JavaScript, because they run before anything is installed.
  const module = await vi.importActual<{ outcomeOf: typeof outcomeOf; outcomeWords: typeof outcomeWords }>(
    '#app/cli/report.mjs',
  )
  ;({ outcomeOf, outcomeWords } = module)
})

function report(
  passed: number,
  failed: number,
  files: { name: string; status: string; tests: string[] }[] = [],
) {
  return {
    numPassedTests: passed,
    numFailedTests: failed,
    numPendingTests: 0,
    numTodoTests: 0,
    testResults: files.map(({ name, status, tests }) => ({
      name,
      status,
      assertionResults: tests.map((one) => ({ status: one })),
    })),
  }
}

describe('counting', () => {
  test('a clean run counts as it says', () => {
    const run = report(3, 0, [{ name: 'a.test.ts', status: 'passed', tests: ['passed', 'passed', 'passed'] }])
    expect(outcomeOf(run, { code: 0 })).toEqual({ passed: 3, failed: 0, skipped: 0, notes: [] })
  })

  test('failed tests count once, not once more for their file', () => {
    const run = report(1, 2, [{ name: 'a.test.ts', status: 'failed', tests: ['passed', 'failed', 'failed'] }])
    expect(outcomeOf(run, { code: 1 }).failed).toBe(2)
  })

  test('a file that could not be loaded is a failure of its own', () => {
    const run = report(1, 0, [
      { name: 'a.test.ts', status: 'passed', tests: ['passed'] },
      { name: 'b.test.ts', status: 'failed', tests: [] },
    ])
    expect(outcomeOf(run, { code: 1 })).toEqual({
      passed: 1,
      failed: 1,
      skipped: 0,
      notes: ['b.test.ts could not be run'],
    })
  })

  test('a run that crashed without a report is one failure', () => {
    expect(outcomeOf(undefined, { code: null, signal: 'SIGKILL' })).toEqual({
      passed: 0,
      failed: 1,
      skipped: 0,
      notes: ['it ended by SIGKILL and left no report'],
    })
  })

  test('a bad status with nothing failed (an unhandled error) is one failure', () => {
    const outcome = outcomeOf(report(5, 0), { code: 1 })
    expect(outcome.failed).toBe(1)
    expect(outcomeWords(outcome)).toBe('5 passed, 1 failed: no test failed, yet it ended with status 1')
  })

  test('a run without any test is a failure, not a success', () => {
    expect(outcomeOf(report(0, 0), { code: 0 }).failed).toBe(1)
  })
})
