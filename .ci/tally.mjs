/**
 * Counts a test run: `node .ci/tally.mjs REPORT STATUS` prints "PASSED FAILED" on stdout, names on stderr what counts as failed though
 * the runner does not call it that. REPORT is the runner's JSON record, STATUS its exit status.
 */
import { readFileSync } from 'node:fs';

const [path, status] = process.argv.slice(2);
let passed = 0;
let failed = 0;
try {
  for (const file of JSON.parse(readFileSync(path, 'utf8')).testResults) {
    if (file.status === 'failed' && file.assertionResults.every((test) => test.status !== 'failed')) {
      failed += 1;
      console.error(`did not run: ${file.name}`);
    }
    for (const test of file.assertionResults) {
      if (test.status === 'passed') passed += 1;
      else failed += 1;
      if (test.status !== 'passed' && test.status !== 'failed') console.error(`skipped, counts as failed: ${test.fullName}`);
    }
  }
} catch (error) {
  console.error(`no record of the test run: ${error.message}`);
}
if (failed === 0 && (status !== '0' || passed === 0)) {
  failed = 1;
  console.error(`the test run itself failed (status ${status})`);
}
console.log(`${passed} ${failed}`);
