/**
 * @typedef {{ passed: number, failed: number, skipped: number }} Counts
 */

/**
 * Counts of one vitest run, from its exit code and its report.
 *
 * @param {number} code
 * @param {{ numPassedTests: number, numFailedTests: number, numPendingTests: number, numTodoTests?: number } | null} report
 * @returns {Counts}
 */
export function countsOf(code, report) {
  if (report === null) return { passed: 0, failed: 1, skipped: 0 }
  const failed = report.numFailedTests
  return {
    passed: report.numPassedTests,
    // A file that breaks before its first test, or an error outside any test, counts no failed test, yet the run is red.
    failed: code !== 0 && failed === 0 ? 1 : failed,
    skipped: report.numPendingTests + (report.numTodoTests ?? 0),
  }
}

/**
 * The one closing line, and the exit code that goes with it.
 *
 * @param {readonly Counts[]} steps lint, types and the like, which pass or fail as a whole
 * @param {readonly Counts[]} tests
 * @returns {{ line: string, code: number }}
 */
export function closingLine(steps, tests) {
  const sum = (parts, key) => parts.reduce((total, part) => total + part[key], 0)
  const testsRun = sum(tests, 'passed') + sum(tests, 'failed')
  const all = [...steps, ...tests]
  // No test at all is a failure: it means that something does not find its tests.
  const failed = sum(all, 'failed') + (testsRun === 0 ? 1 : 0)
  const skipped = sum(all, 'skipped')
  return {
    line: `${sum(all, 'passed')} passed, ${failed} failed${skipped > 0 ? `, ${skipped} skipped` : ''}`,
    code: failed === 0 ? 0 : 1,
  }
}
