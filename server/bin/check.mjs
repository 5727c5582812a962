import { pathToFileURL } from 'node:url';
import { checkNode, main, orderlyEnd, packagesUp, say, startChild } from './setUp.mjs';

const STEPS = [
  { name: 'types', args: ['node_modules/typescript/bin/tsc', '--noEmit', '-p', '.'] },
  {
    name: 'lint and format',
    args: ['node_modules/@biomejs/biome/bin/biome', 'check', '--error-on-warnings', '.'],
  },
  { name: 'unused code and packages', args: ['node_modules/knip/bin/knip.js', '--no-progress'] },
];

/** In `npm test` the import arrows are one of the test files. */
const ARROWS = {
  name: 'import arrows',
  args: ['node_modules/vitest/vitest.mjs', 'run', 'tests/arrows.test.ts'],
};

function step({ name, args }, children) {
  return new Promise((resolve, reject) => {
    const child = startChild(args, process.env, { stdio: ['ignore', 'pipe', 'pipe'], children });
    let output = '';
    child.stdout.on('data', (chunk) => (output += chunk));
    child.stderr.on('data', (chunk) => (output += chunk));
    child.once('error', reject);
    child.once('close', (code) => resolve({ name, passed: code === 0, output }));
  });
}

/** Runs the checks side by side and prints each outcome in order; answers how many passed and failed. */
export async function check(children, steps = STEPS) {
  const running = steps.map((one) => step(one, children));
  const counts = { passed: 0, failed: 0 };
  for (const outcome of running) {
    const { name, passed, output } = await outcome;
    say(`${passed ? 'passed' : 'FAILED'}  ${name}`);
    if (!passed) say(output.trimEnd());
    counts[passed ? 'passed' : 'failed'] += 1;
  }
  return counts;
}

if (import.meta.url === pathToFileURL(process.argv[1] ?? '').href) {
  await main(async () => {
    checkNode();
    const children = [];
    const end = orderlyEnd({ children });
    end.onSignals((number) => 128 + number);
    await packagesUp({ needs: 'vitest', children });
    const { passed, failed } = await check(children, [...STEPS, ARROWS]);
    if (end.isStopping()) return;
    say(`${passed} passed, ${failed} failed`);
    process.exit(failed === 0 ? 0 : 1);
  });
}
