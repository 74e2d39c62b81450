/** Counting what a test run came to. A run that broke counts as a failure, whatever its report says. */

/**
 * @typedef {{ passed: number, failed: number, skipped: number, notes: string[] }} Outcome
 */

/**
 * The outcome of one vitest run.
 * @param {unknown} report parsed JSON report, or undefined when there is none
 * @param {{ code: number | null, signal?: string | null }} end how the program ended
 * @returns {Outcome}
 */
export function outcomeOf(report, end) {
  if (!isReport(report)) {
    return { passed: 0, failed: 1, skipped: 0, notes: [`it ended ${endWords(end)} and left no report`] }
  }
  const notes = []
  let failed = report.numFailedTests
  // A file that could not even be loaded holds no tests that could fail, so it is counted itself.
  for (const file of report.testResults) {
    if (file.status !== 'failed' || file.assertionResults.some((test) => test.status === 'failed')) continue
    failed += 1
    notes.push(`${file.name} could not be run`)
  }
  if (failed === 0 && end.code !== 0) {
    failed = 1
    notes.push(`no test failed, yet it ended ${endWords(end)}`)
  }
  if (failed === 0 && report.numPassedTests === 0) {
    failed = 1
    notes.push('it ran no test at all')
  }
  return {
    passed: report.numPassedTests,
    failed,
    skipped: report.numPendingTests + report.numTodoTests,
    notes,
  }
}

/** @param {Outcome} outcome */
export function outcomeWords({ passed, failed, skipped, notes }) {
  const counts = [
    `${passed} passed`,
    `${failed} failed`,
    ...(skipped > 0 ? [`${skipped} skipped`] : []),
  ].join(', ')
  return notes.length === 0 ? counts : `${counts}: ${notes.join('; ')}`
}

/** @param {{ code: number | null, signal?: string | null }} end */
function endWords({ code, signal }) {
  return code === null ? `by ${signal ?? 'a failure to start'}` : `with status ${code}`
}

/**
 * @param {unknown} value
 * @returns {value is { numPassedTests: number, numFailedTests: number, numPendingTests: number, numTodoTests: number,
 *   testResults: { name: string, status: string, assertionResults: { status: string }[] }[] }}
 */
function isReport(value) {
  return typeof value === 'object' && value !== null && 'numPassedTests' in value && 'testResults' in value
}
