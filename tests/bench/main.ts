import { readdirSync } from 'node:fs';

/**
 * `npm run bench -- NAME`: runs tests/bench/NAME.ts, whose `bench()` prints its progress and gives its
 * figures, and ends with them as one JSON line.
 */
const here = new URL('./', import.meta.url);
const names = readdirSync(here)
  .filter((file) => file.endsWith('.ts') && file !== 'main.ts')
  .map((file) => file.slice(0, -'.ts'.length))
  .sort();
const [name = ''] = process.argv.slice(2);

if (names.includes(name)) {
  console.log(
    `Benchmark "${name}". Other work on this machine makes the figures worse; ratios suffer least.`,
  );
  const { bench } = (await import(new URL(`${name}.ts`, here).href)) as {
    bench: () => Promise<Record<string, number>>;
  };
  console.log(JSON.stringify(await bench()));
} else {
  const asked = name === '' ? 'Which benchmark?' : `There is no benchmark called "${name}".`;
  console.error(`${asked} npm run bench -- NAME, where NAME is one of: ${names.join(', ')}`);
  process.exitCode = 1;
}
