/**
 * What the JSON reporter of vitest writes, as far as it is read here.
 * @typedef {object} Results
 * @property {{ status: string, assertionResults: { status: string }[] }[]} testResults
 */

/**
 * Counts single tests. A file that could not even be loaded has no tests, and counts as one failed; so does a run that
 * went wrong outside of any test (an unhandled rejection, no result at all).
 * @param {Results | undefined} results
 * @param {number} code exit code of the run
 * @returns {{ passed: number, failed: number, skipped: number }}
 */
export function tally(results, code) {
  const count = { passed: 0, failed: 0, skipped: 0 }
  for (const file of results?.testResults ?? []) {
    if (file.status === 'failed' && !file.assertionResults.some((test) => test.status === 'failed')) count.failed++
    for (const test of file.assertionResults) {
      if (test.status === 'passed') count.passed++
      else if (test.status === 'failed') count.failed++
      else count.skipped++
    }
  }
  if (code !== 0 && count.failed === 0) count.failed = 1
  return count
}
