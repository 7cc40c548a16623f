/**
 * What vitest's JSON report means for `npm test`. A run that tested nothing, a file that could not be
 * loaded, a skipped test and an error outside any test are failures too, not silence.
 */

/**
 * @typedef {object} VitestReport
 * @property {number} numPassedTests
 * @property {number} numFailedTests
 * @property {number} numPendingTests
 * @property {number} numTodoTests
 * @property {{ name: string, status: string, message?: string, assertionResults: { status: string }[] }[]} testResults
 */

/**
 * @param {VitestReport | null} report null when vitest wrote none
 * @param {number} exitCode vitest's
 * @returns {{ passed: number, failed: number, notes: string[] }}
 */
export function readVitestReport(report, exitCode) {
  if (report === null)
    return { passed: 0, failed: 1, notes: [`vitest wrote no report and ended with code ${exitCode}.`] };
  const notes = [];
  let failed = report.numFailedTests;
  const unloaded = report.testResults.filter(
    ({ status, assertionResults }) =>
      status === 'failed' && !assertionResults.some((test) => test.status === 'failed'),
  );
  if (unloaded.length > 0) {
    failed += unloaded.length;
    notes.push(`Files that failed outside their tests: ${unloaded.map(({ name }) => name).join(', ')}.`);
  }
  const skipped = report.numPendingTests + report.numTodoTests;
  if (skipped > 0) {
    failed += skipped;
    notes.push(`${skipped} tests were skipped; a test that does not run counts as failed.`);
  }
  if (report.numPassedTests + failed === 0) {
    failed = 1;
    notes.push('No test ran.');
  }
  if (exitCode !== 0 && failed === 0) {
    failed = 1;
    notes.push(`All tests passed, but vitest ended with code ${exitCode}: an error outside the tests.`);
  }
  return { passed: report.numPassedTests, failed, notes };
}
