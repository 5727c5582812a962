import { existsSync, readdirSync, readFileSync } from 'node:fs';
import path from 'node:path';
import { fileURLToPath } from 'node:url';
import { describe, expect, test } from 'vitest';

const ROOT = fileURLToPath(new URL('..', import.meta.url));
const ALL = [
  ...Array.from({ length: 60 }, (_one, index) => `R${index + 1}`),
  ...Array.from({ length: 6 }, (_one, index) => `G${index + 1}`),
];

interface Row {
  readonly number: string;
  readonly files: readonly string[];
  readonly why: string;
}

function table(text: string): Row[] {
  return [...text.matchAll(/^\| ([RG]\d+) \|([^|]*)\|([^|]*)\|$/gm)].map(
    ([, number = '', files = '', why = '']) => ({
      number,
      files: [...files.matchAll(/`([^`]+)`/g)].map(([, file = '']) => file),
      why: why.trim(),
    }),
  );
}

/** Numbers in a file's code: names of tests and messages, not comments. */
function numbersIn(file: string): Set<string> {
  const code = readFileSync(path.join(ROOT, file), 'utf8')
    .split('\n')
    .filter((line) => !/^\s*(\/\/|\/?\*)/.test(line))
    .join('\n');
  return new Set(code.match(/\b(?:R(?:60|[1-5]\d|[1-9])|G[1-6])\b/g) ?? []);
}

const rows = table(readFileSync(path.join(ROOT, 'tests/guard.md'), 'utf8'));
const testFiles = readdirSync(path.join(ROOT, 'tests'), { recursive: true, encoding: 'utf8' })
  .map((name) => `tests/${name.split(path.sep).join('/')}`)
  .filter((name) => /\.test\.tsx?$/.test(name) && name !== 'tests/guard.test.ts');

describe('the table of the guard', () => {
  test('has every number once, in order', () => {
    expect(rows.map(({ number }) => number)).toEqual(ALL);
  });

  test('names only files that are there and name the number', () => {
    const wrong = rows.flatMap(({ number, files }) =>
      files
        .filter((file) => !existsSync(path.join(ROOT, file)) || !numbersIn(file).has(number))
        .map((file) => `${number}: ${file}`),
    );
    expect(wrong).toEqual([]);
  });

  test('says why where no test holds a number', () => {
    const silent = rows.filter(({ files, why }) => files.length === 0 && !/^[A-Z].{20,}\.$/.test(why));
    expect(silent).toEqual([]);
  });

  test('lists every test that names a number; where one is missing, add its file to that row', () => {
    const listed = new Map(rows.map(({ number, files }) => [number, new Set(files)]));
    const missing = testFiles.flatMap((file) =>
      [...numbersIn(file)]
        .filter((number) => !listed.get(number)?.has(file))
        .map((number) => `${number}: ${file}`),
    );
    expect(missing).toEqual([]);
  });

  test('is read as it is written', () => {
    const [row] = table('| R7 | `tests/a.test.ts`, `tests/b.test.ts` | Not yet. |\n');
    expect(row).toEqual({ number: 'R7', files: ['tests/a.test.ts', 'tests/b.test.ts'], why: 'Not yet.' });
  });
});
