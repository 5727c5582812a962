import { describe, expect, test } from 'vitest';
import { ageInDays, standingOf } from '../../../shared/rules/standing.ts';

const clean = { departed: 0, leaks: 0 };

describe('a network’s standing', () => {
  test('follows its age against its limit: due from nine tenths on, overdue past it (common practice, no source)', () => {
    const at = (ratio: number | null) => standingOf({ ratio, ...clean });
    expect([0, 0.899, 0.9, 1, 1.001].map(at)).toEqual(['in_order', 'in_order', 'due', 'due', 'overdue']);
    expect(at(null)).toBe('due');
  });

  test('is exposed by one departed holder or one leak, whatever its age', () => {
    for (const ratio of [null, 0, 0.95, 3]) {
      expect(standingOf({ ratio, departed: 1, leaks: 0 })).toBe('exposed');
      expect(standingOf({ ratio, departed: 0, leaks: 1 })).toBe('exposed');
    }
  });

  test('counts days of 24 hours, and a clock that went back makes nothing younger than new', () => {
    const live = new Date('2026-03-28T12:00:00Z');
    // Clocks go forward in between; a day of age stays 24 hours.
    expect(ageInDays(live, new Date('2026-03-30T00:00:00Z'))).toBe(1.5);
    expect(ageInDays(live, new Date('2026-03-27T00:00:00Z'))).toBe(0);
  });
});
