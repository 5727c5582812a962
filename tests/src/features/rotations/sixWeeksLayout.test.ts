import { describe, expect, test } from 'vitest';
import type { RotationSummary } from '../../../../shared/api/rotations.ts';
import {
  changeMarks,
  placeMarks,
  sixWeeks,
  voyageBars,
  weekTicks,
} from '../../../../src/features/rotations/sixWeeksLayout.ts';

// Ship's days by the IANA time zone database: Europe/Zagreb is UTC+2 in June, and leaves summer time on 25 October 2026.
const ZONE = 'Europe/Zagreb';
const now = new Date('2026-06-14T12:12:00Z');

const change = (given: Partial<RotationSummary>): RotationSummary => ({
  id: 'a',
  networkId: 'n',
  ssid: 'Tamarisk Guests',
  audience: 'guest',
  state: 'planned',
  sentence: '',
  mode: 'graceful',
  driver: 'by_hand',
  plannedBy: 'plan',
  reasons: [],
  dueAt: '2026-06-20T09:00:00Z',
  deadlineAt: null,
  stagedAt: null,
  liveAt: null,
  endedAt: null,
  verified: 0,
  of: 0,
  ...given,
});

const voyage = (startsAt: string, endsAt: string) => ({
  id: startsAt,
  kind: 'charter' as const,
  title: 'A charter',
  startsAt,
  endsAt,
  fromPort: null,
  toPort: null,
});

describe('the next six weeks', () => {
  test("begin at the ship's midnight, not at that of UTC", () => {
    expect(new Date(sixWeeks(now, ZONE).from).toISOString()).toBe('2026-06-13T22:00:00.000Z');
  });

  test('are labelled by the week, with the month where it is new', () => {
    expect(weekTicks(sixWeeks(now, ZONE), ZONE).map(({ label }) => label)).toEqual([
      '14 June',
      '21',
      '28',
      '5 July',
      '12',
      '19',
      '26',
    ]);
  });

  test('name the right days across the end of summer time', () => {
    const autumn = new Date('2026-10-11T08:00:00Z');
    expect(weekTicks(sixWeeks(autumn, ZONE), ZONE).map(({ label }) => label)).toEqual([
      '11 October',
      '18',
      '25',
      '1 November',
      '8',
      '15',
      '22',
    ]);
  });

  test('cut voyages to themselves and keep those that overlap apart', () => {
    const bars = voyageBars(
      [
        voyage('2026-06-01T10:00:00Z', '2026-06-14T08:00:00Z'),
        voyage('2026-06-14T12:00:00Z', '2026-06-20T08:00:00Z'),
        voyage('2026-06-18T12:00:00Z', '2026-06-22T08:00:00Z'),
        voyage('2026-05-01T12:00:00Z', '2026-05-22T08:00:00Z'),
      ],
      sixWeeks(now, ZONE),
    );
    expect(bars.map(({ row }) => row)).toEqual([0, 0, 1]);
    expect(bars[0]?.left).toBe(0);
  });
});

describe('marks', () => {
  const span = sixWeeks(now, ZONE);

  test('say done, planned, under way and late', () => {
    const marks = changeMarks(
      {
        calendar: [
          change({ id: 'planned' }),
          change({ id: 'late', dueAt: '2026-06-14T12:00:00Z', state: 'staged' }),
          change({ id: 'now', dueAt: '2026-06-13T12:00:00Z', state: 'unknown' }),
        ],
        history: [
          change({ id: 'done', state: 'live', liveAt: '2026-06-14T09:00:00Z' }),
          change({ id: 'before', state: 'retired', liveAt: '2026-06-01T09:00:00Z' }),
          change({ id: 'cancelled', state: 'cancelled' }),
        ],
      },
      span,
      now,
    );
    expect(Object.fromEntries(marks.map(({ change: { id }, state }) => [id, state]))).toEqual({
      done: 'done',
      planned: 'planned',
      late: 'late',
      now: 'now',
    });
  });

  test('that are near each other stand in rows of their own', () => {
    const marks = changeMarks(
      {
        calendar: [change({ id: 'soon', dueAt: '2026-06-14T15:00:00Z' }), change({ id: 'later' })],
        history: [change({ id: 'done', state: 'live', liveAt: '2026-06-14T09:00:00Z' })],
      },
      span,
      now,
    );
    expect(placeMarks(marks).map(({ change: { id }, row }) => [id, row])).toEqual([
      ['done', 0],
      ['soon', 1],
      ['later', 0],
    ]);
  });
});
