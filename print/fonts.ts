import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { create, type Font } from 'fontkit';
import { woffToTtf } from './woff.ts';

/** Separators of a passphrase, plain text, names and values, headings. */
export type Weight = 300 | 400 | 500 | 600;

/** A stretch of text that one font file can draw. */
export interface FontRun {
  readonly font: CardFont;
  readonly text: string;
}

export interface CardFont {
  /** Names the file within one process, such as "lexend-latin-500". */
  readonly key: string;
  readonly font: Font;
}

/**
 * Which file is asked for a character, first to last. Lexend comes in two files; Greek and
 * Cyrillic, which it lacks, come from Manrope, whose proportions are close to it.
 */
const FILES = [
  ['lexend', 'latin'],
  ['lexend', 'latin-ext'],
  ['manrope', 'greek'],
  ['manrope', 'cyrillic'],
  ['manrope', 'cyrillic-ext'],
] as const;

/** Invisible or combining: without shaping tables they would vanish or land in the wrong place. */
const NOT_DRAWABLE = /[\p{C}\p{M}\p{Zl}\p{Zp}]/u;

/** Manrope's stems are thinner than Lexend's at the same number; these look alike side by side. */
const MANROPE_WEIGHT: Readonly<Record<Weight, number>> = { 300: 400, 400: 600, 500: 700, 600: 800 };

const require = createRequire(import.meta.url);
const fonts = new Map<string, CardFont>();
const placed = new Map<string, Placed | null>();

interface Placed {
  readonly font: CardFont;
  /** In thousandths of the type size. */
  readonly advance: number;
}

function cardFont(family: string, subset: string, weight: Weight): CardFont {
  const key = `${family}-${subset}-${family === 'manrope' ? MANROPE_WEIGHT[weight] : weight}`;
  const known = fonts.get(key);
  if (known !== undefined) return known;
  const file = require.resolve(`@fontsource/${family}/files/${key}-normal.woff`);
  const made = { key, font: create(woffToTtf(readFileSync(file))) };
  fonts.set(key, made);
  return made;
}

function place(character: string, weight: Weight): Placed | null {
  const key = weight + character;
  const known = placed.get(key);
  if (known !== undefined) return known;
  const found = find(character, weight);
  // Characters of names only, one entry for each: it stays as small as the fonts are.
  if (found !== null) placed.set(key, found);
  return found;
}

function find(character: string, weight: Weight): Placed | null {
  const codePoint = character.codePointAt(0);
  if (codePoint === undefined || NOT_DRAWABLE.test(character)) return null;
  for (const [family, subset] of FILES) {
    const candidate = cardFont(family, subset, weight);
    if (candidate.font.hasGlyphForCodePoint(codePoint)) {
      const { advanceWidth } = candidate.font.glyphForCodePoint(codePoint);
      return { font: candidate, advance: (advanceWidth * 1000) / candidate.font.unitsPerEm };
    }
  }
  return null;
}

/** The characters of `text` that no shipped font can draw, each once, in order. */
export function missingCharacters(text: string): string[] {
  return [...new Set(text)].filter((character) => place(character, 500) === null);
}

/**
 * Width of a line in points, as it will be drawn: no kerning is applied.
 * @throws Error for a character that no shipped font can draw; see `missingCharacters`.
 */
export function textWidth(text: string, weight: Weight, size: number): number {
  let thousandths = 0;
  for (const character of text) thousandths += required(character, weight).advance;
  return (thousandths * size) / 1000;
}

/**
 * Cuts a text where the font file changes.
 * @throws Error for a character that no shipped font can draw; see `missingCharacters`.
 */
export function fontRuns(text: string, weight: Weight): FontRun[] {
  const runs: { font: CardFont; text: string }[] = [];
  for (const character of text) {
    const { font } = required(character, weight);
    const last = runs.at(-1);
    if (last?.font === font) last.text += character;
    else runs.push({ font, text: character });
  }
  return runs;
}

function required(character: string, weight: Weight): Placed {
  const found = place(character, weight);
  if (found === null) throw new Error('A character reached the page without a font to draw it.');
  return found;
}
