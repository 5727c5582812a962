import { randomInt } from 'node:crypto';
import {
  GENERATED_BITS_MIN,
  PASSPHRASE_MAX,
  PASSPHRASE_MIN,
  WORDS_MAX,
  WORDS_MIN,
} from '../../shared/rules/limits.ts';
import { WORDS } from './wordList.ts';

/** A whole number from 0 up to but not including `limit`, each equally likely. */
export type Draw = (limit: number) => number;

/** How much to generate: a number of words, or the fewest bits it must have. */
export type Wanted = { words: number } | { bits: number };

/** A fresh passphrase. `bits` is exact: the binary logarithm of how many equally likely ones there were. */
export interface Generated {
  passphrase: string;
  bits: number;
  words: number;
}

const SEPARATOR = '-';
/** Draws before giving up; at 8 words every second one fits, so this is never reached by chance. */
const MOST_DRAWS = 1000;

/**
 * Makes a passphrase of lower-case words joined by hyphens, 8 to 63 characters, at least 64 bits. Letters
 * a–z and the hyphen only: every phone's keyboard has them, no QR reader treats them specially, and without
 * capitals and digits there are no look-alikes (`l`/`I`/`1`, `O`/`0`).
 *
 * Words are drawn independently and with replacement by `crypto.randomInt`, which rejects rather than takes a
 * remainder, so none is likelier than another. A draw longer than 63 characters is thrown away whole and made
 * again; the bits count only what fits.
 *
 * @param random the source of randomness; tests put their own in.
 * @throws RangeError when the words or bits asked for are out of range, or `random` gives a wrong number.
 */
export function generate(
  wanted: Wanted = { words: WORDS_MIN },
  random: Draw = (limit) => randomInt(limit),
): Generated {
  const words = 'words' in wanted ? checkedWords(wanted.words) : wordsForBits(wanted.bits);
  for (let attempt = 0; attempt < MOST_DRAWS; attempt++) {
    const passphrase = Array.from({ length: words }, () => drawWord(random)).join(SEPARATOR);
    if (passphrase.length >= PASSPHRASE_MIN && passphrase.length <= PASSPHRASE_MAX) {
      return { passphrase, bits: bitsOfWords(words), words };
    }
  }
  throw new RangeError('The source of randomness keeps giving passphrases that are too long.');
}

/** The fewest words whose passphrases have at least `bits` bits. Throws RangeError when 8 words are not enough. */
export function wordsForBits(bits: number): number {
  for (let words = WORDS_MIN; words <= WORDS_MAX; words++) {
    if (bitsOfWords(words) >= Math.max(bits, GENERATED_BITS_MIN)) return words;
  }
  const most = Math.floor(bitsOfWords(WORDS_MAX));
  throw new RangeError(`A passphrase of words can have at most ${most} bits. Ask for fewer.`);
}

/** Exact bits of a passphrase of so many words: log2 of the number of those that fit 8 to 63 characters. */
export function bitsOfWords(words: number): number {
  const known = BITS.get(words);
  if (known !== undefined) return known;
  const bits = Math.log2(Number(countThatFit(words)));
  BITS.set(words, bits);
  return bits;
}

const BITS = new Map<number, number>();

/** How many sequences of `words` words are 8 to 63 characters long once joined by hyphens. */
export function countThatFit(words: number, list: readonly string[] = WORDS): bigint {
  const byLength = new Map<number, bigint>();
  for (const word of list) byLength.set(word.length, (byLength.get(word.length) ?? 0n) + 1n);
  let counts = new Map<number, bigint>([[0, 1n]]);
  for (let place = 0; place < words; place++) {
    const next = new Map<number, bigint>();
    for (const [length, ways] of counts) {
      for (const [added, choices] of byLength) {
        const total = length + added + (place === 0 ? 0 : SEPARATOR.length);
        if (total <= PASSPHRASE_MAX) next.set(total, (next.get(total) ?? 0n) + ways * choices);
      }
    }
    counts = next;
  }
  let fitting = 0n;
  for (const [length, ways] of counts) if (length >= PASSPHRASE_MIN) fitting += ways;
  return fitting;
}

function checkedWords(words: number): number {
  if (Number.isInteger(words) && words >= WORDS_MIN && words <= WORDS_MAX) return words;
  throw new RangeError(`A passphrase has ${WORDS_MIN} to ${WORDS_MAX} words.`);
}

function drawWord(random: Draw): string {
  const word = WORDS[random(WORDS.length)];
  if (word === undefined) throw new RangeError('The source of randomness gave a number out of range.');
  return word;
}
