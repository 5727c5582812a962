import { afterAll, describe, expect, test } from 'vitest';
import {
  closeScorer,
  contextWords,
  Scorer,
  ScoreUnavailable,
  scoreTyped,
} from '../../../server/passphrases/score.ts';
import { strongEnough } from '../../../shared/rules/strength.ts';
import { WIFI_SECURITIES } from '../../../shared/rules/wifi.ts';

afterAll(closeScorer);

const own = ['Aurora', 'M/Y Aurora', 'Sea Wolf', 'SeaWolf', 'guest', 'crew', 'owner'];

// What @zxcvbn-ts/core 4.2.0 with language-common 4.1.3 and language-en 4.1.1 was seen to give with its default
// options; ours differ (fewer letter substitutions), which these inputs do not reach.
describe('guesses', () => {
  test.each<[string, number, number]>([
    ['12345678', 4, 4],
    ['abcdefgh', 33, 33],
    ['qwertyuiop', 24, 24],
    ['aaaaaaaa', 97, 97],
    ['password123', 797, 797],
    ['captain123', 41_000, 41_000],
    ['MYAurora', 99_600, 15_000],
    ['welcomeaboard', 775_830, 775_830],
    ['anchorsaweigh', 4.32112e8, 4.32112e8],
    ['bluewater88', 8.7554e7, 8.7554e7],
    ['mediterranean1', 59_984, 59_984],
    ['Tr0ub4dour&3', 4.11604e11, 4.11604e11],
    ['correcthorsebatterystaple', 6.27229e12, 6.27229e12],
    ['correct horse battery staple', 5.27329e19, 5.27329e19],
    ['harbour-lantern-41', 3.13442e12, 3.13442e12],
    ['owner-stateroom-19', 1.10196e13, 1.46344e12],
    ['a8Kd93Lq0ZxP', 1e12, 1e12],
    ['spyglass-eruption-sapphire', 1.11358e16, 1.11358e16],
  ])('%s: %d, and %d knowing the boat', async (typed, plain, knowing) => {
    const without = await scoreTyped(typed, []);
    const withOwn = await scoreTyped(typed, own);
    expect(without.guesses / plain).toBeCloseTo(1, 4);
    expect(withOwn.guesses / knowing).toBeCloseTo(1, 4);
    expect(withOwn.bits).toBeCloseTo(Math.log2(withOwn.guesses), 9);
  });

  // The figures themselves move with the calendar: years are scored by their distance from today.
  test.each(['aurora2024', 'SeaWolf2025', 'Aurora2026!', 'guestwifi2026'])(
    '%s: easier knowing the boat',
    async (typed) => {
      const without = await scoreTyped(typed, []);
      const withOwn = await scoreTyped(typed, own);
      expect(withOwn.guesses).toBeLessThan(without.guesses / 3);
      expect(withOwn.guesses).toBeLessThan(1e9);
    },
  );

  test('letters swapped for signs are still seen through', async () => {
    expect((await scoreTyped('p@ssw0rd1', [])).guesses).toBeLessThan(1000);
  });

  test.each(['Tamarisk', 'MYTamarisk', 'tamarisk-guests', 'Tamarisk2026', 'Brandvold1!'])(
    'R20: %s is not strong enough for any network of that boat',
    async (typed) => {
      const context = contextWords(['M/Y Tamarisk', 'Tamarisk Guests', 'Ingrid Brandvold', 'Split']);
      const score = await scoreTyped(typed, context);
      for (const security of WIFI_SECURITIES) expect(strongEnough(0, security, score)).toBe(false);
    },
  );

  test('nothing typed is one guess', async () => {
    expect(await scoreTyped('', [])).toEqual({ guesses: 1, bits: 0 });
  });

  test('only the first 63 characters count', async () => {
    const filler = 'kq7Zr'.repeat(13).slice(0, 63);
    const cut = await scoreTyped(filler, []);
    const long = await scoreTyped(filler + 'x9#Q'.repeat(5000), []);
    expect(long).toEqual(cut);
  });

  test("one boat's words are not kept for the next", async () => {
    const before = await scoreTyped('tamarisksplit', []);
    const knowing = await scoreTyped('tamarisksplit', contextWords(['Tamarisk', 'Split']));
    const after = await scoreTyped('tamarisksplit', []);
    expect(knowing.guesses).toBeLessThan(before.guesses);
    expect(after).toEqual(before);
  });
});

describe("the vessel's own words", () => {
  test('whole, joined and in parts, each once', () => {
    expect(contextWords(['M/Y Tamarisk', 'Tamarisk Guests', null, undefined, ''])).toEqual([
      'm/y tamarisk',
      'mytamarisk',
      'tamarisk guests',
      'tamariskguests',
      'tamarisk',
      'guests',
    ]);
    expect(contextWords(['Émeraude Équipage'])).toContain('émeraude');
    expect(contextWords(Array.from({ length: 300 }, (_, index) => `Name${index}`))).toHaveLength(100);
  });
});

describe('the worker', () => {
  test('answers each question with its own answer, in any number at once', async () => {
    const typed = ['12345678', 'password123', 'captain123', 'a8Kd93Lq0ZxP', 'abcdefgh'];
    const together = await Promise.all(typed.map((text) => scoreTyped(text, [])));
    for (const [index, text] of typed.entries()) expect(together[index]).toEqual(await scoreTyped(text, []));
  });

  test('too many at once are refused with a sentence, the rest answered', async () => {
    const scorer = new Scorer();
    const asked = Array.from({ length: 70 }, () => scorer.score('12345678', []));
    const settled = await Promise.allSettled(asked);
    const refused = settled.filter((outcome) => outcome.status === 'rejected');
    expect(refused).toHaveLength(5); // one is being answered, 64 wait
    for (const outcome of refused) {
      expect(outcome.reason).toBeInstanceOf(ScoreUnavailable);
      expect(String(outcome.reason)).toContain('Try again in a few seconds');
    }
    await scorer.close();
  });

  test('a new one is started when it dies; the question it had is refused, those waiting are answered', async () => {
    const scorer = new Scorer();
    await scorer.score('12345678', []);
    const first = scorer.threadId;
    // Anything that is not text makes the scorer throw, which ends its thread.
    const broken = Reflect.apply(scorer.score, scorer, [Object.assign(['x'], { slice: () => null }), []]);
    const waiting = scorer.score('12345678', []);
    await expect(broken).rejects.toThrow('The strength check stopped. Try again.');
    expect((await waiting).guesses).toBe(4);
    expect(scorer.threadId).not.toBe(first);
    await scorer.close();
  });

  test('one that takes too long is ended and the question refused', async () => {
    const scorer = new Scorer(1); // loading the dictionaries alone takes hundreds of milliseconds
    await expect(scorer.score('12345678', [])).rejects.toThrow('The strength check stopped. Try again.');
    expect(scorer.threadId).toBeUndefined();
    await scorer.close();
  });

  test('closing refuses what waits and the next question starts afresh', async () => {
    const scorer = new Scorer();
    const pending = [scorer.score('12345678', []), scorer.score('abcdefgh', [])];
    const settled = Promise.allSettled(pending);
    await scorer.close();
    expect((await settled).map((outcome) => outcome.status)).toEqual(['rejected', 'rejected']);
    expect(scorer.threadId).toBeUndefined();
    expect((await scorer.score('12345678', [])).guesses).toBe(4);
    await scorer.close();
    await scorer.close();
  });
});
