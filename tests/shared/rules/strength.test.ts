import { describe, expect, test } from 'vitest';
import {
  averageGuessSeconds,
  guessRate,
  leastBits,
  OFFLINE_GUESSES_PER_SECOND,
  roughGuess,
  roughTime,
  strongEnough,
  timeInWords,
  verdict,
  weakSentence,
  YEAR_SECONDS,
} from '../../../shared/rules/strength.ts';

/** Relative error of `actual` against a published figure. */
function off(actual: number, published: number): number {
  return Math.abs(actual - published) / published;
}

// hashcat mode 22000 on one RTX 4090, 2,539,800 guesses/s; average = N / 2R, year = 31,557,600 s. The table
// was computed from those two figures; the precision asked here is that of its last digit.
describe('average time to guess on WPA2', () => {
  test.each([
    ['8 digits', 10 ** 8, 19.69, 0.005],
    ['10 digits', 10 ** 10, 1968.66, 0.005],
    ['8 × a–z', 26 ** 8, 41_110.9, 0.05],
    ['8 × a–z0–9', 36 ** 8, 555_380, 0.5],
    ['10 × a–z0–9', 36 ** 10, 7.19773e8, 500],
    ['12 × a–z0–9', 36 ** 12, 9.328e11, 5e7],
    ['2 words', 7776 ** 2, 11.9, 0.05],
    ['3 words', 7776 ** 3, 92_563.4, 0.05],
    ['4 words', 7776 ** 4, 7.19773e8, 500],
    ['5 words', 7776 ** 5, 5.597e12, 5e8],
    ['6 words', 7776 ** 6, 4.352e16, 5e12],
  ])('%s', (_name, count, seconds, half) => {
    const average = verdict({ security: 'wpa2', guesses: count }).averageSeconds;
    expect(Math.abs(average - seconds)).toBeLessThanOrEqual(half);
    expect(verdict({ security: 'transition', guesses: count }).averageSeconds).toBe(average);
    expect(off(verdict({ security: 'wpa2', bits: Math.log2(count) }).averageSeconds, average)).toBeLessThan(
      1e-9,
    );
  });

  test('bits for a ten-year average: one, eight and a thousand graphics cards', () => {
    for (const [cards, bits] of [
      [1, 50.51],
      [8, 53.51],
      [1000, 60.48],
    ] as const) {
      const seconds = averageGuessSeconds(bits, OFFLINE_GUESSES_PER_SECOND * cards);
      expect(off(seconds, 10 * YEAR_SECONDS)).toBeLessThan(0.004);
    }
  });

  test('full search: 1e10 guesses take 1.094 h, 1e12 4.56 d, 1e14 1.25 y', () => {
    const full = (guesses: number): number => 2 * averageGuessSeconds(Math.log2(guesses), guessRate('wpa2'));
    expect(full(1e10) / 3600).toBeCloseTo(1.094, 3);
    expect(full(1e12) / 86_400).toBeCloseTo(4.56, 2);
    expect(full(1e14) / YEAR_SECONDS).toBeCloseTo(1.25, 2);
  });
});

describe('what the verdict says', () => {
  test('it follows how the network can be attacked', () => {
    const threeHours = 2 * 3 * 3600 * OFFLINE_GUESSES_PER_SECOND;
    expect(verdict({ security: 'wpa2', guesses: threeHours })).toMatchObject({
      grade: 'weak',
      attack: 'recorded',
      words: 'about 3 hours for someone who recorded one phone joining',
    });
    expect(verdict({ security: 'transition', guesses: threeHours }).attack).toBe('recorded');
    const alone = verdict({ security: 'wpa3', guesses: threeHours });
    expect(alone).toMatchObject({ grade: 'fair', attack: 'present' });
    expect(alone.words).toBe('about 17 years for someone trying one after another within reach of the boat');
  });

  test('grades: five words are strong, the least is fair, a hair under it is weak', () => {
    expect(verdict({ security: 'wpa2', bits: 64.62 }).grade).toBe('strong');
    expect(verdict({ security: 'wpa2', bits: 64.62 }).words).toBe(
      'longer than anyone will try, even someone who recorded one phone joining',
    );
    expect(verdict({ security: 'wpa2', guesses: 1e14 }).grade).toBe('fair');
    expect(verdict({ security: 'wpa2', guesses: 0.999e14 }).grade).toBe('weak');
    expect(verdict({ security: 'wpa2', bits: 51.699 }).grade).toBe('fair');
  });

  test('something made up is never called strong', () => {
    expect(verdict({ security: 'wpa2', guesses: 1e30 }).grade).toBe('fair');
    expect(verdict({ security: 'wpa2', bits: Math.log2(1e30) }).grade).toBe('strong');
  });

  test('guessed before its age limit runs out is weak', () => {
    const bits = 48;
    const days = averageGuessSeconds(bits, guessRate('wpa2')) / 86_400;
    expect(verdict({ security: 'wpa2', bits, ageLimitDays: Math.floor(days) }).grade).toBe('fair');
    expect(verdict({ security: 'wpa2', bits, ageLimitDays: Math.ceil(days) }).grade).toBe('weak');
  });

  test('no guesses at all is still a verdict', () => {
    expect(verdict({ security: 'wpa2', guesses: 0 })).toMatchObject({ grade: 'weak', bits: 0 });
    expect(verdict({ security: 'wpa2', guesses: 0 }).words).toMatch(/^less than a second/);
  });
});

describe('strong enough for a change', () => {
  test('the policy counts, and the least of the kind of network where the policy asks less', () => {
    expect(strongEnough(64, 'wpa2', { bits: 64.62 })).toBe(true);
    expect(strongEnough(64, 'wpa2', { bits: 63.99 })).toBe(false);
    expect(strongEnough(20, 'wpa2', { guesses: 1e14 })).toBe(true);
    expect(strongEnough(20, 'wpa2', { guesses: 9.9e13 })).toBe(false);
    expect(strongEnough(20, 'transition', { guesses: 9.9e13 })).toBe(false);
    expect(strongEnough(20, 'wpa3', { guesses: 9.9e13 })).toBe(true);
    expect(strongEnough(20, 'wpa3', { guesses: 1e9 })).toBe(false);
    expect(strongEnough(64, 'wpa3', { guesses: 9.9e13 })).toBe(false);
    expect(leastBits('wpa2')).toBeCloseTo(Math.log2(1e14), 10);
  });

  // zxcvbn's best score starts at 1e10 guesses: an hour for one graphics card.
  test("the scorer's own best mark is not enough on WPA2, and the sentence says why", () => {
    expect(strongEnough(0, 'wpa2', { guesses: 1e10 })).toBe(false);
    expect(weakSentence('wpa2', { guesses: 1e10 })).toBe(
      'Too easy to guess: about 33 minutes for someone who recorded one phone joining. Let Quayword make one, or use more words that do not belong together.',
    );
  });
});

describe('spans in words', () => {
  test.each([
    [0, 'less than a second', 'seconds'],
    [0.49, 'less than a second', 'seconds'],
    [1, 'about 1 second', 'seconds'],
    [19.69, 'about 20 seconds', 'seconds'],
    [59.4, 'about 59 seconds', 'seconds'],
    [59.6, 'about 1 minute', 'minutes'],
    [1968.66, 'about 33 minutes', 'minutes'],
    [3590, 'about 1 hour', 'hours'],
    [41_110.9, 'about 11 hours', 'hours'],
    [92_563.4, 'about 1 day', 'days'],
    [555_380, 'about 6 days', 'days'],
    [30 * 86_400, 'about 30 days', 'days'],
    [31 * 86_400, 'about 1 month', 'months'],
    [0.96 * YEAR_SECONDS, 'about 1 year', 'years'],
    [7.19773e8, 'about 23 years', 'years'],
    [99.4 * YEAR_SECONDS, 'about 99 years', 'years'],
    [99.6 * YEAR_SECONDS, 'about 1 century', 'centuries'],
    [9999 * YEAR_SECONDS, 'about 100 centuries', 'centuries'],
    [10_000 * YEAR_SECONDS, 'longer than anyone will try', 'centuries'],
    [Number.POSITIVE_INFINITY, 'longer than anyone will try', 'centuries'],
  ])('%d s', (seconds, words, rough) => {
    expect(timeInWords(seconds)).toBe(words);
    expect(roughTime(seconds)).toBe(rough);
  });

  test('a span that is none is refused', () => {
    expect(() => timeInWords(Number.NaN)).toThrow(RangeError);
    expect(() => roughTime(-1)).toThrow(RangeError);
  });

  test("the fleet's words", () => {
    expect(roughGuess('wpa2', Math.log2(26 ** 8))).toBe('hours to guess');
    expect(roughGuess('wpa2', 51.699)).toBe('years to guess');
    expect(roughGuess('wpa2', 64.62)).toBe('centuries to guess');
  });
});
