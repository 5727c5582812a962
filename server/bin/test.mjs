import { existsSync, mkdtempSync, readFileSync, rmSync } from 'node:fs';
import os from 'node:os';
import path from 'node:path';
import { check } from './check.mjs';
import { databaseUp } from './database.mjs';
import {
  checkNode,
  clientUp,
  debianUp,
  onPath,
  orderlyEnd,
  packagesUp,
  say,
  sentenceOf,
  startChild,
} from './setUp.mjs';

/** What the tests run beside our own code, and the Debian package of each. */
const PROGRAMS = {
  chromium: 'chromium',
  zbarimg: 'zbar-tools',
  pdftoppm: 'poppler-utils',
  wpa_passphrase: 'wpasupplicant',
  hostapd: 'hostapd',
};

// `npm test`: everything that is checked before a change counts, on a fresh machine too. Arguments choose test files
// and leave the checks of the source out. The last line is always "N passed, N failed".
const chosen = process.argv.slice(2);
const children = [];
const end = orderlyEnd({ children });
end.onSignals((number) => 128 + number);
const total = { passed: 0, failed: 0 };
end.last(() => say(`${total.passed} passed, ${total.failed} failed`));
try {
  await everything();
} catch (error) {
  total.failed += 1;
  if (!end.isStopping()) process.stderr.write(`${sentenceOf(error)}\n`);
}
await end.stop(total.failed === 0 && total.passed > 0 ? 0 : 1);

async function everything() {
  checkNode();
  await packagesUp({ needs: 'vitest', children });
  const missing = Object.keys(PROGRAMS).filter((program) => !onPath(program));
  debianUp(
    missing.map((program) => PROGRAMS[program]),
    'The test suite',
  );
  const folder = mkdtempSync(path.join(os.tmpdir(), 'quayword-run-'));
  end.last(() => rmSync(folder, { recursive: true, force: true }));
  say('Starting a throw-away database…');
  const starting = databaseUp({ dir: folder, name: 'quayword', log: say, fast: true, firstPort: 54480 });
  end.last(() => starting.then((database) => database.discard()).catch(() => undefined));
  const database = await starting;
  await clientUp({ children });
  if (chosen.length === 0) count(await check(children));
  if (!end.isStopping()) count(await tests(database, path.join(folder, 'report.json')));
}

function count({ passed, failed }) {
  total.passed += passed;
  total.failed += failed;
}

/** Runs the test files; a file that could not even be read, and a run that broke off, count as failures too. */
function tests({ ownerUrl, appUrl }, report) {
  const args = ['--reporter=default', '--reporter=json', `--outputFile.json=${report}`, ...chosen];
  const env = { ...process.env, QW_TEST_OWNER_URL: ownerUrl, QW_TEST_APP_URL: appUrl };
  return new Promise((resolve, reject) => {
    const child = startChild(['node_modules/vitest/vitest.mjs', 'run', ...args], env, { children });
    child.once('error', reject);
    child.once('exit', (code) => {
      if (!existsSync(report)) return resolve({ passed: 0, failed: 1 });
      const told = JSON.parse(readFileSync(report, 'utf8'));
      const unread = told.testResults.filter(
        (file) =>
          file.status === 'failed' && !file.assertionResults.some(({ status }) => status === 'failed'),
      ).length;
      const failed = told.numFailedTests + unread;
      resolve({ passed: told.numPassedTests, failed: code !== 0 && failed === 0 ? 1 : failed });
    });
  });
}
