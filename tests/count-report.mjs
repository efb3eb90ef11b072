/** Counts of one vitest JSON report; a file that could not be loaded counts as one failed test. */
export function countReport(report) {
  const counts = { passed: 0, failed: 0, skipped: 0 };
  for (const file of report.testResults) {
    let failedHere = 0;
    for (const { status } of file.assertionResults) {
      if (status === "passed") counts.passed++;
      else if (status === "failed") failedHere++;
      else counts.skipped++;
    }
    if (file.status === "failed" && failedHere === 0) failedHere = 1;
    counts.failed += failedHere;
  }
  return counts;
}
