import { describe, expect, test } from 'vitest';
import {
  ageInDays,
  ageInWords,
  dayFraction,
  inWords,
  sameShipDay,
  shipClock,
  shipDate,
  shipDateTime,
  shipMoment,
  shipMomentInWords,
  untilInWords,
  zoneOffset,
} from '../../src/lib/shipTime.ts';

const now = new Date('2026-06-14T12:12:00Z');
const ZAGREB = 'Europe/Zagreb';

describe('dates and clocks in ship’s time', () => {
  test('say the weekday, and the year only when it is another one', () => {
    expect(shipDateTime('2026-06-20T08:00:00Z', ZAGREB, now)).toBe('Sat 20 June 10:00');
    expect(shipDate('2027-01-02T08:00:00Z', ZAGREB, now)).toBe('Sat 2 January 2027');
    expect(shipDate(new Date('2026-09-01T08:00:00Z'), ZAGREB, now)).toBe('Tue 1 September');
  });

  test('leave the date out on the ship’s own today, which need not be UTC’s', () => {
    expect(shipMoment('2026-06-14T12:06:00Z', ZAGREB, now)).toBe('14:06');
    // 22:30 UTC is already the 15th in Split.
    expect(shipMoment('2026-06-14T22:30:00Z', ZAGREB, now)).toBe('Mon 15 June 00:30');
    expect(shipMomentInWords('2026-06-14T12:06:00Z', ZAGREB, now)).toBe('today 14:06');
    expect(shipMomentInWords('2026-06-15T12:06:00Z', ZAGREB, now)).toBe('Mon 15 June 14:06');
    expect(sameShipDay('2026-06-14T22:30:00Z', now, ZAGREB)).toBe(false);
    expect(sameShipDay('2026-06-14T22:30:00Z', now, 'UTC')).toBe(true);
  });

  test('midnight is 00:00, not 24:00', () => {
    expect(shipClock('2026-06-14T22:00:00Z', ZAGREB)).toBe('00:00');
    expect(dayFraction('2026-06-14T22:00:00Z', ZAGREB)).toBe(0);
  });

  test('the day’s fraction follows the wall clock, also on days of 23 and 25 hours', () => {
    expect(dayFraction('2026-06-14T10:00:00Z', ZAGREB)).toBe(0.5);
    // 29 March 2026: clocks go from 02:00 to 03:00 (IANA time zone database, rule EU).
    expect(dayFraction('2026-03-29T10:00:00Z', ZAGREB)).toBe(0.5);
    // 25 October 2026: 02:30 comes twice and is drawn in the same place.
    expect(dayFraction('2026-10-25T00:30:00Z', ZAGREB)).toBe(dayFraction('2026-10-25T01:30:00Z', ZAGREB));
  });
});

describe('the offset from UTC', () => {
  // Offsets from the IANA time zone database.
  test.each([
    [ZAGREB, '2026-06-14T12:00:00Z', 'UTC+2'],
    [ZAGREB, '2026-12-14T12:00:00Z', 'UTC+1'],
    ['UTC', '2026-06-14T12:00:00Z', 'UTC'],
    ['Africa/Abidjan', '2026-06-14T12:00:00Z', 'UTC'],
    ['Asia/Kathmandu', '2026-06-14T12:00:00Z', 'UTC+5:45'],
    ['America/St_Johns', '2026-06-14T12:00:00Z', 'UTC-2:30'],
    ['Pacific/Kiritimati', '2026-06-14T12:00:00Z', 'UTC+14'],
  ])('%s at %s is %s', (zone, at, said) => {
    expect(zoneOffset(zone, at)).toBe(said);
  });
});

describe('ages in words', () => {
  const MINUTE = 60_000;
  test.each([
    [-5, 'under a minute'],
    [0, 'under a minute'],
    [MINUTE - 1, 'under a minute'],
    [MINUTE, '1 min'],
    [60 * MINUTE - 1, '59 min'],
    [60 * MINUTE, '1 hour'],
    [3 * 60 * MINUTE, '3 hours'],
    [48 * 60 * MINUTE - 1, '47 hours'],
    [48 * 60 * MINUTE, '2 days'],
    [41 * 1440 * MINUTE, '41 days'],
  ])('%i ms is %s', (milliseconds, said) => {
    expect(inWords(milliseconds)).toBe(said);
  });

  test('look back from now, and ahead of it', () => {
    expect(ageInWords('2026-06-14T09:12:00Z', now)).toBe('3 hours');
    expect(untilInWords('2026-06-14T12:26:00Z', now)).toBe('14 min');
    expect(ageInDays('2026-06-13T00:12:00Z', now)).toBe(1.5);
    expect(ageInDays('2026-07-01T00:00:00Z', now)).toBe(0);
  });
});
