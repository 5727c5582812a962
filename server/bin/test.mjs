import { spawn } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import os from 'node:os';
import path from 'node:path';
import { check } from './check.mjs';
import { checkNode, clientUp, debianUp, main, packagesUp, ROOT, say } from './setUp.mjs';

const TEST_PROGRAMS = {
  chromium: 'chromium',
  zbarimg: 'zbar-tools',
  pdftoppm: 'poppler-utils',
  wpa_passphrase: 'wpasupplicant',
};

// Everything that is checked before a change counts, on a fresh machine too. Arguments choose test files.
await main(async () => {
  checkNode();
  packagesUp();
  const chosen = process.argv.slice(2);
  debianUp(TEST_PROGRAMS, 'The test suite');
  const folder = mkdtempSync(path.join(os.tmpdir(), 'quayword-run-'));
  const { databaseUp } = await import('./database.mjs');
  say('Starting a throw-away database…');
  const database = await databaseUp({
    dir: folder,
    name: 'quayword',
    log: () => undefined,
    fast: true,
    firstPort: 54480,
  });
  let code = 1;
  try {
    await clientUp();
    const checks = chosen.length === 0 ? await check() : { passed: 0, failed: 0 };
    const report = path.join(folder, 'report.json');
    const vitest = await run(
      [
        'node_modules/vitest/vitest.mjs',
        'run',
        '--reporter=default',
        '--reporter=json',
        `--outputFile.json=${report}`,
        ...chosen,
      ],
      { ...process.env, QW_TEST_OWNER_URL: database.ownerUrl, QW_TEST_APP_URL: database.appUrl },
    );
    const counts = JSON.parse(readFileSync(report, 'utf8'));
    // A file that could not even be read has no tests of its own, and still failed.
    const emptyFailures = counts.testResults.filter(
      (file) => file.status === 'failed' && file.assertionResults.length === 0,
    ).length;
    const passed = counts.numPassedTests + checks.passed;
    let failed = counts.numFailedTests + checks.failed + emptyFailures;
    if (vitest !== 0 && failed === 0) failed = 1;
    code = failed === 0 && passed > 0 ? 0 : 1;
    say(`${passed} passed, ${failed} failed`);
  } finally {
    await database.stop();
    rmSync(folder, { recursive: true, force: true });
  }
  process.exit(code);
});

function run(args, env) {
  return new Promise((resolve) => {
    const child = spawn(process.execPath, args, { cwd: ROOT, env, stdio: 'inherit' });
    const pass = (signal) => child.kill(signal);
    process.once('SIGINT', pass);
    process.once('SIGTERM', pass);
    child.once('exit', (status) => resolve(status ?? 1));
  });
}
