import { spawn } from 'node:child_process';
import { pathToFileURL } from 'node:url';
import { checkNode, main, packagesUp, ROOT, say } from './setUp.mjs';

const STEPS = [
  { name: 'types', args: ['node_modules/typescript/bin/tsc', '--noEmit', '-p', '.'] },
  {
    name: 'lint and format',
    args: ['node_modules/@biomejs/biome/bin/biome', 'check', '--error-on-warnings', '.'],
  },
  { name: 'unused code and packages', args: ['node_modules/knip/bin/knip.js', '--no-progress'] },
];

function step({ name, args }) {
  return new Promise((resolve) => {
    const child = spawn(process.execPath, args, { cwd: ROOT, stdio: ['ignore', 'pipe', 'pipe'] });
    let output = '';
    child.stdout.on('data', (chunk) => (output += chunk));
    child.stderr.on('data', (chunk) => (output += chunk));
    child.once('exit', (code) => resolve({ name, passed: code === 0, output }));
  });
}

/** Runs every check and prints each outcome; answers how many passed and failed. Import arrows are a test of their own. */
export async function check() {
  let passed = 0;
  let failed = 0;
  for (const one of STEPS) {
    const { name, passed: good, output } = await step(one);
    say(`${good ? 'passed' : 'FAILED'}  ${name}`);
    if (!good) say(output);
    if (good) passed += 1;
    else failed += 1;
  }
  return { passed, failed };
}

if (import.meta.url === pathToFileURL(process.argv[1] ?? '').href) {
  await main(async () => {
    checkNode();
    packagesUp();
    const checks = await check();
    const arrows = await step({
      name: 'import arrows',
      args: ['node_modules/vitest/vitest.mjs', 'run', 'tests/arrows.test.ts'],
    });
    say(`${arrows.passed ? 'passed' : 'FAILED'}  import arrows`);
    if (!arrows.passed) say(arrows.output);
    const failed = checks.failed + (arrows.passed ? 0 : 1);
    say(`${checks.passed + (arrows.passed ? 1 : 0)} passed, ${failed} failed`);
    process.exit(failed === 0 ? 0 : 1);
  });
}
