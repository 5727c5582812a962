import { textWidth, type Weight } from './fonts.ts';

/** What a block of text may take, in points. */
export interface Room {
  readonly width: number;
  readonly height: number;
  readonly mostLines: number;
  /** Type sizes tried, largest first, in quarter points. */
  readonly largest: number;
  readonly smallest: number;
}

export interface Fitted {
  readonly size: number;
  readonly lines: readonly string[];
  /** Baseline to baseline. */
  readonly leading: number;
}

/** Baseline to baseline, as a share of the type size. */
export const LEADING = 1.22;
const STEP = 0.25;

/** Separators of a passphrase: drawn light, and the only places where it is broken by choice. */
export const SEPARATOR = /[-_. ]/u;

/**
 * The largest size at which a text fits, broken only after its breaks; failing that, the largest
 * at which it fits when broken between any two characters. The lines are made even, so that none
 * is left with one short word. Nothing is ever inserted or dropped: joining the lines gives the
 * text back, so a space at a break stays at the end of its line.
 *
 * @returns null when it fits at no allowed size.
 */
export function fitText(text: string, weight: Weight, room: Room, breakAfter: RegExp = / /u): Fitted | null {
  return evenly(wordsOf(text, breakAfter), weight, room) ?? evenly([...text], weight, room);
}

/**
 * Running text, broken only at spaces, which are dropped where a line ends.
 * @returns null when it does not fit in `room` at any allowed size.
 */
export function fitSentence(text: string, weight: Weight, room: Room): Fitted | null {
  const fitted = evenly(wordsOf(text, / /u), weight, room);
  return fitted && { ...fitted, lines: fitted.lines.map((line) => line.trimEnd()) };
}

/** As few lines at as large a size as `search` finds, then as narrow as that allows. */
function evenly(pieces: readonly string[], weight: Weight, room: Room): Fitted | null {
  const fitted = search(pieces, weight, room);
  if (fitted === null || fitted.lines.length < 2) return fitted;
  const { size } = fitted;
  let best = fitted;
  for (let width = room.width - 1; width > 0; width -= 1) {
    const narrower = search(pieces, weight, { ...room, width, largest: size, smallest: size });
    if (narrower === null || narrower.lines.length > fitted.lines.length) break;
    best = narrower;
  }
  return best;
}

function search(pieces: readonly string[], weight: Weight, room: Room): Fitted | null {
  const measured = pieces.map((text) => ({
    text,
    // A space that ends a line may hang over its edge, so it does not count at the end.
    width: textWidth(text, weight, 1),
    inked: textWidth(text.trimEnd(), weight, 1),
  }));
  for (let size = room.largest; size >= room.smallest; size -= STEP) {
    const lines = pour(measured, room.width / size);
    const leading = size * LEADING;
    if (lines !== null && lines.length <= room.mostLines) {
      if (size + leading * (lines.length - 1) <= room.height) return { size, lines, leading };
    }
  }
  return null;
}

interface Measured {
  readonly text: string;
  readonly width: number;
  readonly inked: number;
}

/** Fills lines in turn; null when a piece is wider than a line. Widths are at size 1. */
function pour(pieces: readonly Measured[], width: number): string[] | null {
  const lines: string[] = [];
  let line = '';
  let used = 0;
  for (const piece of pieces) {
    if (piece.inked > width) return null;
    if (line !== '' && used + piece.inked > width) {
      lines.push(line);
      line = '';
      used = 0;
    }
    line += piece.text;
    used += piece.width;
  }
  lines.push(line);
  return lines;
}

/** Cuts after every run of break characters, keeping them. */
function wordsOf(text: string, breakAfter: RegExp): string[] {
  const words: string[] = [];
  let word = '';
  let broken = false;
  for (const character of text) {
    const isBreak = breakAfter.test(character);
    if (broken && !isBreak && word !== '') {
      words.push(word);
      word = '';
    }
    word += character;
    broken = isBreak;
  }
  if (word !== '') words.push(word);
  return words;
}

/** Height of a line's tall letters, as a share of the type size: Lexend's, a little rounded up. */
export const CAP_HEIGHT = 0.75;

/** From the first baseline to the last, in points. */
export function linesHeight(fitted: Fitted): number {
  return fitted.leading * (fitted.lines.length - 1);
}

/** From the tops of the first line's tall letters to the last baseline, in points. */
export function blockHeight(fitted: Fitted): number {
  return fitted.size * CAP_HEIGHT + linesHeight(fitted);
}
