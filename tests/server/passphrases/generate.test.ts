import { randomBytes } from 'node:crypto';
import { describe, expect, test } from 'vitest';
import { bitsOfWords, countThatFit, generate, wordsForBits } from '../../../server/passphrases/generate.ts';
import { WORDS } from '../../../server/passphrases/wordList.ts';
import { checkPassphrase, passphraseCautions } from '../../../shared/rules/passphrase.ts';

/**
 * How far a count of draws is from uniform, in standard deviations of chi-square (mean k − 1, variance
 * 2(k − 1)). Six of them happen by chance about once in a hundred million runs.
 */
function chiSquareDeviations(counts: ArrayLike<number>): number {
  let total = 0;
  for (let index = 0; index < counts.length; index++) total += counts[index] ?? 0;
  const expected = total / counts.length;
  let sum = 0;
  for (let index = 0; index < counts.length; index++)
    sum += ((counts[index] ?? 0) - expected) ** 2 / expected;
  const freedom = counts.length - 1;
  return (sum - freedom) / Math.sqrt(2 * freedom);
}

const place = new Map(WORDS.map((word, index) => [word, index]));

describe('R20: what is drawn', () => {
  test('a million passphrases: each well formed, words uniform in every place', { timeout: 120_000 }, () => {
    const counts = Array.from({ length: 5 }, () => new Uint32Array(WORDS.length));
    let malformed = 0;
    for (let round = 0; round < 1_000_000; round++) {
      const { passphrase } = generate();
      const words = passphrase.split('-');
      if (words.length !== 5 || passphrase.length < 8 || passphrase.length > 63) malformed++;
      for (let index = 0; index < 5; index++) {
        const at = place.get(words[index] ?? '');
        const row = counts[index];
        if (at === undefined || row === undefined) malformed++;
        else row[at] = (row[at] ?? 0) + 1;
      }
    }
    expect(malformed).toBe(0);
    for (const row of counts) expect(Math.abs(chiSquareDeviations(row))).toBeLessThan(6);
  });

  test('the same measure finds the bias of a remainder, so it can fail', () => {
    const counts = new Uint32Array(WORDS.length);
    const bytes = randomBytes(2_000_000);
    for (let at = 0; at < bytes.length; at += 2) {
      const index = bytes.readUInt16BE(at) % WORDS.length;
      counts[index] = (counts[index] ?? 0) + 1;
    }
    expect(chiSquareDeviations(counts)).toBeGreaterThan(6);
  });

  test('at least 64 bits by default and whatever is asked for', () => {
    expect(generate()).toMatchObject({ words: 5 });
    expect(generate().bits).toBeCloseTo(5 * Math.log2(7772), 9);
    expect(generate({ words: 5 }).bits).toBeGreaterThan(64);
    expect(generate({ bits: 1 }).words).toBe(5);
    expect(generate({ bits: 64.6 }).words).toBe(5);
    expect(generate({ bits: 64.7 }).words).toBe(6);
    expect(generate({ bits: 100 })).toMatchObject({ words: 8 });
  });

  test.each([5, 6, 7, 8])('%i words: one every phone reads and types', (words) => {
    for (let round = 0; round < 2000; round++) {
      const { passphrase } = generate({ words });
      expect(checkPassphrase(passphrase)).toEqual({ ok: true });
      expect(passphrase).toMatch(/^[a-z]{3,9}(-[a-z]{3,9})+$/);
      expect(passphrase.split('-')).toHaveLength(words);
      expect(passphraseCautions(passphrase)).toEqual([]);
    }
  });

  test.each([4, 9, 0, -1, 5.5, Number.NaN, Number.POSITIVE_INFINITY])('%d words are refused', (words) => {
    expect(() => generate({ words })).toThrow(/5 to 8 words/);
  });

  test('more bits than eight words hold are refused with the most there can be', () => {
    expect(() => generate({ bits: 103 })).toThrow(/at most 102 bits/);
    expect(() => generate({ bits: 300 })).toThrow(RangeError);
  });
});

describe('bits are counted honestly', () => {
  test('up to six words everything fits; of seven and eight some does not', () => {
    const all = (words: number): bigint => BigInt(WORDS.length) ** BigInt(words);
    expect(countThatFit(5)).toBe(all(5));
    expect(countThatFit(6)).toBe(all(6));
    expect(countThatFit(7)).toBeLessThan(all(7));
    expect(countThatFit(8)).toBeLessThan(all(8));
    expect(bitsOfWords(7)).toBeLessThan(7 * Math.log2(7772));
    expect(bitsOfWords(7)).toBeGreaterThan(bitsOfWords(6) + 12);
    expect(bitsOfWords(8)).toBeGreaterThan(102);
  });

  test('the count equals counting one by one on a small list', () => {
    const list = ['sea', 'keel', 'mooring', 'navigator', 'bosun'];
    for (const words of [1, 2, 3]) {
      let phrases: string[] = [''];
      for (let at = 0; at < words; at++) {
        phrases = phrases.flatMap((left) => list.map((word) => (left === '' ? word : `${left}-${word}`)));
      }
      const fitting = phrases.filter((phrase) => phrase.length >= 8 && phrase.length <= 63).length;
      expect(countThatFit(words, list)).toBe(BigInt(fitting));
    }
    expect(countThatFit(7, ['navigator'])).toBe(0n); // 7 × 9 + 6 = 69 characters
    expect(countThatFit(6, ['navigator'])).toBe(1n); // 6 × 9 + 5 = 59
  });

  test('the share of eight-word draws that fit is the share counted', () => {
    let draws = 0;
    const kept = 20_000;
    for (let round = 0; round < kept; round++) {
      generate({ words: 8 }, (limit) => {
        draws++;
        return Math.floor(Math.random() * limit);
      });
    }
    const counted = Number(countThatFit(8)) / WORDS.length ** 8;
    expect(Math.abs(kept / (draws / 8) - counted)).toBeLessThan(0.02);
  });
});

describe('with a source of randomness of our own', () => {
  test('the first and the last word can be drawn, and the limit asked for is the list', () => {
    const asked: number[] = [];
    const first = generate({ words: 5 }, (limit) => {
      asked.push(limit);
      return 0;
    });
    expect(first.passphrase).toBe('abacus-abacus-abacus-abacus-abacus');
    expect(asked).toEqual([7772, 7772, 7772, 7772, 7772]);
    expect(generate({ words: 5 }, (limit) => limit - 1).passphrase).toBe('zoom-zoom-zoom-zoom-zoom');
  });

  test('a draw that is too long is thrown away whole', () => {
    const long = WORDS.findIndex((word) => word.length === 9);
    const short = WORDS.findIndex((word) => word.length === 3);
    const draws = [...Array.from({ length: 8 }, () => long), ...Array.from({ length: 8 }, () => short)];
    const { passphrase } = generate({ words: 8 }, () => draws.shift() ?? Number.NaN);
    expect(passphrase).toBe(Array.from({ length: 8 }, () => WORDS[short]).join('-'));
    expect(draws).toEqual([]);
  });

  test.each([[7772], [-1], [0.5], [Number.NaN]])('a number out of range (%d) is refused', (wrong) => {
    expect(() => generate({ words: 5 }, () => wrong)).toThrow(/out of range/);
  });

  test('one that only ever gives long words is given up on', () => {
    const long = WORDS.findIndex((word) => word.length === 9);
    expect(() => generate({ words: 8 }, () => long)).toThrow(/too long/);
  });

  test('the fewest words for so many bits', () => {
    expect(wordsForBits(64)).toBe(5);
    expect(wordsForBits(bitsOfWords(5))).toBe(5);
    expect(wordsForBits(bitsOfWords(5) + 1e-9)).toBe(6);
  });
});
