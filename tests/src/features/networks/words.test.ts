import { describe, expect, test } from 'vitest';
import {
  bitsInWords,
  daysInWords,
  quietHoursInWords,
} from '../../../../src/features/networks/policyWords.ts';
import { awaitsEntry, holdersWords, leakWords } from '../../../../src/features/networks/words.ts';

// Wording is the project's own: "14 people hold it, 2 have signed off".
describe('who holds a passphrase', () => {
  test('the departed stand in a clause of their own', () => {
    expect(holdersWords({ audience: 'crew', holders: { current: 12, departed: 2 } })).toEqual({
      held: '14 people hold it',
      departed: '2 have signed off',
    });
    expect(holdersWords({ audience: 'guest', holders: { current: 0, departed: 1 } })).toEqual({
      held: '1 person holds it',
      departed: '1 has left',
    });
  });

  test('nobody is not said to be current', () => {
    expect(holdersWords({ audience: 'owner', holders: { current: 0, departed: 0 } }).held).toBe(
      'Nobody is on record as holding it',
    );
  });

  test('lost cards and leaks', () => {
    const leak = { id: '', at: '', note: null, serial: null };
    expect(leakWords([])).toBeNull();
    expect(
      leakWords([
        { ...leak, kind: 'lost_card' },
        { ...leak, kind: 'reported' },
      ]),
    ).toBe('1 card is lost and a leak is reported');
  });
});

describe('rules in words', () => {
  test.each([
    [[1, 2, 3, 4, 5, 6, 7], 'every day'],
    [[5, 1, 2, 3, 4], 'Mon to Fri'],
    [[7, 6], 'Sat and Sun'],
    [[1, 3, 5], 'Mon, Wed, Fri'],
  ])('%j: %s', (days, words) => {
    expect(daysInWords(days)).toBe(words);
  });

  test('a stretch past midnight says so', () => {
    expect(quietHoursInWords([{ days: [6], from: '23:00', to: '02:00' }])).toBe(
      'Sat 23:00 to 02:00 the next day',
    );
    expect(quietHoursInWords([])).toBe('at any hour');
  });

  // 2^46 guesses on average at 2,539,800 a second (hashcat benchmark, mode 22000) are 320.7 days; at 50 a second, 44,600 years.
  test('bits mean something else on WPA3 alone', () => {
    expect(bitsInWords(47, 'wpa2')).toBe('about 11 months for someone who recorded one phone joining');
    expect(bitsInWords(47, 'wpa3')).toBe(
      'longer than anyone will try, even someone trying one after another within reach of the boat',
    );
  });
});

describe('a change that only waits for its entry', () => {
  const change = { state: 'staged', driver: 'by_hand', dueAt: '2026-06-14T12:00:00Z' } as const;
  test('is by hand, ready, and its time has come', () => {
    expect(awaitsEntry(change, new Date('2026-06-14T12:00:00Z'))).toBe(true);
    expect(awaitsEntry(change, new Date('2026-06-14T11:59:59Z'))).toBe(false);
    expect(awaitsEntry({ ...change, driver: 'rehearsal' }, new Date('2026-06-14T12:00:00Z'))).toBe(false);
    expect(awaitsEntry({ ...change, state: 'planned' }, new Date('2026-06-14T12:00:00Z'))).toBe(false);
  });
});
