/** What vitest's JSON report says, in two numbers. A file that could not even be run is one failure. */
export function countResults(report) {
  const files = Array.isArray(report?.testResults) ? report.testResults : []
  let passed = 0
  let failed = 0
  for (const file of files) {
    const tests = file.assertionResults ?? []
    passed += tests.filter((test) => test.status === 'passed').length
    const failedTests = tests.filter((test) => test.status === 'failed').length
    failed += failedTests === 0 && file.status === 'failed' ? 1 : failedTests
  }
  return { passed, failed }
}

/** A run that ended badly is never reported without a failure, nor one that ran nothing. */
export function verdict({ counts, exitCode, failedSteps }) {
  const { passed, failed } = counts
  const unexplained = exitCode !== 0 && failed === 0 ? 1 : 0
  const total = failed + unexplained + failedSteps.length
  return { line: `${passed} passed, ${total} failed`, exitCode: total === 0 && passed > 0 ? 0 : 1 }
}
