import { readdirSync, readFileSync } from 'node:fs';
import path from 'node:path';
import { fileURLToPath } from 'node:url';
import { describe, expect, test } from 'vitest';

const ROOT = fileURLToPath(new URL('..', import.meta.url));
const ROOMS = ['src', 'server', 'shared', 'print'];

interface File {
  readonly name: string;
  readonly imports: readonly string[];
}

/** What a source file imports of our own, as paths from the project's folder. `type` imports count too. */
function importsOf(name: string, text: string): string[] {
  const code = text.replace(/^\s*\/\*[\s\S]*?\*\//gm, '').replace(/^\s*\/\/.*$/gm, '');
  const found = [...code.matchAll(/(?:from|import)\s*\(?\s*['"](\.{1,2}\/[^'"]+)['"]/g)];
  return found.map(([, target = '']) =>
    path.posix.normalize(path.posix.join(path.posix.dirname(name), target)),
  );
}

const files: File[] = ROOMS.flatMap((room) =>
  readdirSync(path.join(ROOT, room), { recursive: true, encoding: 'utf8' })
    .filter((name) => /\.(tsx?|mjs)$/.test(name))
    .map((name) => {
      const full = path.posix.join(room, name.split(path.sep).join('/'));
      return { name: full, imports: importsOf(full, readFileSync(path.join(ROOT, full), 'utf8')) };
    }),
);

const below = (folder: string) => (name: string) => name.startsWith(`${folder}/`);
const feature = (name: string) => /^src\/features\/([^/]+)\//.exec(name)?.[1];

/** A sentence for each rule that an import breaks. */
function wrongWay(from: string, to: string): string | null {
  const inRoom = (room: string) => below(room)(from);
  if (inRoom('shared') && !below('shared')(to)) return 'shared imports nothing of the other rooms';
  if (inRoom('print') && !below('print')(to) && !below('shared')(to)) return 'print imports shared only';
  if (inRoom('server') && below('src')(to)) return 'the server does not import the client';
  if (inRoom('src')) {
    if (below('server')(to)) return 'the client does not import the server';
    if (below('print')(to)) return 'the client does not import print';
    if (below('src/app')(to) && !below('src/app')(from) && from !== 'src/main.tsx')
      return 'only the app knows the app';
    if (below('src/pages')(to) && !below('src/app')(from)) return 'only the app knows the pages';
    const mine = feature(from);
    const theirs = feature(to);
    if (mine && theirs && mine !== theirs) return 'a feature imports no sibling';
    if (theirs && (below('src/components')(from) || below('src/lib')(from)))
      return 'building blocks know no feature';
    if (below('src/lib')(from) && below('src/components')(to)) return 'lib knows no component';
  }
  return null;
}

/** The first circle of imports found, as the files along it. */
function circle(all: readonly File[]): string[] | null {
  const byName = new Map(all.map((file) => [file.name, file]));
  const done = new Set<string>();
  const walk = (name: string, trail: readonly string[]): string[] | null => {
    if (trail.includes(name)) return [...trail.slice(trail.indexOf(name)), name];
    if (done.has(name)) return null;
    for (const next of byName.get(name)?.imports ?? []) {
      const found = walk(next, [...trail, name]);
      if (found) return found;
    }
    done.add(name);
    return null;
  };
  for (const { name } of all) {
    const found = walk(name, []);
    if (found) return found;
  }
  return null;
}

describe('imports', () => {
  test('go one way', () => {
    const wrong = files.flatMap(({ name, imports }) =>
      imports.flatMap((to) => {
        const rule = wrongWay(name, to);
        return rule ? [`${name} → ${to}: ${rule}`] : [];
      }),
    );
    expect(wrong).toEqual([]);
  });

  test('name files that exist', () => {
    const known = new Set(files.map(({ name }) => name));
    const lost = files.flatMap(({ name, imports }) =>
      imports.filter((to) => /\.(tsx?|mjs)$/.test(to) && !known.has(to)).map((to) => `${name} → ${to}`),
    );
    expect(lost).toEqual([]);
  });

  test('make no circle', () => {
    expect(circle(files)).toBeNull();
  });

  test('are seen by these very rules', () => {
    expect(
      importsOf(
        'src/a/b.ts',
        "import x from '../c.ts';\nawait import('./d.tsx');\nexport { y } from '../../shared/e.ts'",
      ),
    ).toEqual(['src/c.ts', 'src/a/d.tsx', 'shared/e.ts']);
    // A path pattern is no comment, and what a comment says is no import.
    expect(
      importsOf('src/a.ts', "const glob = 'src/**/*.ts';\nimport x from './b.ts';\nconst c = '*/';"),
    ).toEqual(['src/b.ts']);
    expect(importsOf('src/a.ts', "/** import x from './b.ts' */\n// import y from './c.ts'")).toEqual([]);
    expect(wrongWay('src/features/cards/a.ts', 'src/features/log/b.ts')).not.toBeNull();
    expect(wrongWay('src/features/cards/a.ts', 'src/features/cards/b.ts')).toBeNull();
    expect(wrongWay('shared/a.ts', 'server/b.ts')).not.toBeNull();
    expect(
      circle([
        { name: 'a', imports: ['b'] },
        { name: 'b', imports: ['a'] },
      ]),
    ).toEqual(['a', 'b', 'a']);
    expect(
      circle([
        { name: 'a', imports: ['b'] },
        { name: 'b', imports: [] },
      ]),
    ).toBeNull();
  });
});
