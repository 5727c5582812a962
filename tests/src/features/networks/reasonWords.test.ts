import { describe, expect, test } from 'vitest';
import { planReason } from '../../../../shared/api/rotations.ts';
import {
  isLate,
  type ReasonContext,
  reasonLine,
  reasonWords,
} from '../../../../src/features/networks/reasonWords.ts';

// Wording is the project's own; instants are read in Split, UTC+2 in June (IANA Europe/Zagreb).
const context: ReasonContext = {
  zone: 'Europe/Zagreb',
  now: new Date('2026-06-14T12:12:00Z'),
  dueAt: '2026-06-20T09:00:00Z',
  audience: 'guest',
  quiet: true,
  voyages: [
    {
      id: '00000000-0000-4000-8000-000000000001',
      kind: 'charter',
      title: 'Brandvold charter',
      startsAt: '2026-06-14T12:00:00Z',
      endsAt: '2026-06-20T08:00:00Z',
      fromPort: null,
      toPort: null,
    },
  ],
};

describe('why a change happens when it does', () => {
  test('after a party, with the charter that ends then', () => {
    expect(reasonWords({ code: 'party_departure', at: '2026-06-20T08:00:00Z' }, context)).toBe(
      'after the party leaves at 10:00 (Brandvold charter)',
    );
  });

  test('without the title where whoever asks reads a neutral one', () => {
    const neutral = context.voyages.map((voyage) => ({ ...voyage, title: 'Charter' }));
    const words = reasonWords(
      { code: 'party_departure', at: '2026-06-20T08:00:00Z' },
      { ...context, voyages: neutral },
    );
    expect(words).toBe('after the party leaves at 10:00');
  });

  test('a departure on another day says which', () => {
    const words = reasonWords(
      { code: 'party_departure', at: '2026-06-19T20:00:00Z' },
      { ...context, voyages: [] },
    );
    expect(words).toBe('after the party leaves at Fri 19 June 22:00');
  });

  test.each([
    ['2026-06-24T09:00:00Z', 'quiet hour, 4 days before the limit'],
    ['2026-06-21T09:00:00Z', 'quiet hour, 1 day before the limit'],
    ['2026-06-20T10:00:00Z', 'quiet hour, just before its limit of 45 days'],
    ['2026-06-17T09:00:00Z', 'the first quiet hour after its limit of 45 days'],
  ])('age limit reached at %s: %s', (reachedAt, words) => {
    expect(reasonWords({ code: 'age_limit', days: 45, reachedAt }, { ...context, audience: 'crew' })).toBe(
      words,
    );
  });

  test("the owner's network waits until the owner is ashore", () => {
    expect(
      reasonWords(
        { code: 'age_limit', days: 365, reachedAt: '2026-06-30T09:00:00Z' },
        { ...context, audience: 'owner', quiet: false },
      ),
    ).toBe('10 days before the limit, when the owner is ashore');
  });

  test('every code of the contract has words of its own', () => {
    const at = '2026-06-13T08:00:00Z';
    const all = planReason.options.map((option) => {
      const code = option.shape.code.value;
      return planReason.parse({
        code,
        ...('at' in option.shape ? { at } : {}),
        ...('until' in option.shape ? { until: at } : {}),
        ...('since' in option.shape ? { since: at } : {}),
        ...('from' in option.shape ? { from: at } : {}),
        ...('days' in option.shape ? { days: 14, reachedAt: at } : {}),
        ...('why' in option.shape ? { why: 'dismissal' } : {}),
        ...('ticket' in option.shape ? { ticket: 12 } : {}),
      });
    });
    const words = all.map((reason) => reasonWords(reason, context));
    expect(new Set(words).size).toBe(planReason.options.length);
    for (const one of words) expect(one).not.toMatch(/undefined|null|NaN|[_]/);
    expect(all.filter(isLate).map(({ code }) => code)).toEqual(['overdue']);
  });

  test('several reasons stand in one line', () => {
    expect(
      reasonLine(
        [
          { code: 'person', why: 'routine' },
          { code: 'put_off', from: '2026-06-16T08:30:00Z' },
        ],
        context,
      ),
    ).toBe('set by hand; put off from Tue 16 June 10:30');
  });
});
