import { readFileSync, writeFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { create } from 'fontkit';
import { expect, test } from 'vitest';
import { evenFigures } from '../../print/evenFigures.ts';
import { woffToTtf } from '../../print/woff.ts';

const require = createRequire(import.meta.url);
/** Weight and width in font units; 1000 to the em. */
const WEIGHTS = [
  [300, 590],
  [400, 590],
  [500, 600],
  [600, 610],
] as const;

function source(weight: number): Buffer {
  return woffToTtf(
    readFileSync(require.resolve(`@fontsource/lexend/files/lexend-latin-${weight}-normal.woff`)),
  );
}

interface Shape {
  path: { commands: unknown[] };
  bbox: { width: number };
}
/** The outline of a figure, which the project's own types of the font reader leave out. */
const shape = (font: ReturnType<typeof create>, code: number) =>
  font.glyphForCodePoint(code) as unknown as Shape;

const kept = (weight: number) => new URL(`../../src/app/fonts/lexend-figures-${weight}.ttf`, import.meta.url);

test.each(WEIGHTS)(
  'the shipped figures of weight %i are what the package gives, evened out',
  (weight, width) => {
    const made = evenFigures(source(weight), width);
    // `QUAYWORD_WRITE_FONTS=1 npx vitest run tests/print/evenFigures.test.ts` writes them afresh after an update.
    if (process.env.QUAYWORD_WRITE_FONTS) writeFileSync(kept(weight), made);
    expect(readFileSync(kept(weight)).equals(made)).toBe(true);
  },
);

test.each(WEIGHTS)(
  'an independent reader finds ten figures of equal width in weight %i, shapes unchanged',
  (weight, width) => {
    const even = create(readFileSync(kept(weight)));
    const before = create(source(weight));
    for (const figure of '0123456789') {
      const code = figure.charCodeAt(0);
      expect(even.glyphForCodePoint(code).advanceWidth).toBe(width);
      const [now, then] = [shape(even, code), shape(before, code)];
      expect(now.path.commands.length).toBe(then.path.commands.length);
      expect(now.bbox.width).toBe(then.bbox.width);
    }
    // The reason it is needed: the package's own figures differ.
    expect(
      new Set([...'0123456789'].map((f) => before.glyphForCodePoint(f.charCodeAt(0)).advanceWidth)).size,
    ).toBeGreaterThan(1);
  },
);
