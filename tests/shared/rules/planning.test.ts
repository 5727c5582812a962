import { Temporal } from 'temporal-polyfill';
import { describe, expect, test } from 'vitest';
import { type PlanInput, PUT_OFF_MS, planNext } from '../../../shared/rules/planning.ts';
import type { QuietHours } from '../../../shared/rules/quietHours.ts';
import { shipInstant, zoneAt } from '../../../shared/rules/shipTime.ts';

const utc = (text: string) => new Date(`${text}Z`);
const zone = (name: string, from = '2020-01-01T00:00:00') => ({ zone: name, fromAt: utc(from) });
const EVERY_NIGHT: QuietHours[] = [{ days: [1, 2, 3, 4, 5, 6, 7], from: '02:00', to: '05:00' }];

const asked = (given: {
  audience?: PlanInput['network']['audience'];
  equipment?: boolean;
  policy?: Partial<PlanInput['policy']>;
  over?: Partial<PlanInput>;
}): PlanInput => ({
  network: { audience: given.audience ?? 'crew', carriesEquipment: given.equipment ?? false },
  policy: {
    ageLimitDays: 30,
    quietHours: EVERY_NIGHT,
    onPartyDeparture: given.audience === 'guest',
    onSignOff: true,
    onLostCard: true,
    onLeak: true,
    ...given.policy,
  },
  liveAt: utc('2026-06-01T10:00:00'),
  zones: [zone('Europe/Zagreb')],
  voyages: [],
  parties: [],
  exposures: [],
  used: new Set(),
  now: utc('2026-06-14T12:12:00'),
  ...given.over,
});

const local = (zones: PlanInput['zones'], at: Date) =>
  Temporal.Instant.fromEpochMilliseconds(at.getTime())
    .toZonedDateTimeISO(zoneAt(zones, at))
    .toPlainDateTime()
    .toString({ smallestUnit: 'minute' });

describe('guest network: in the gap between two parties (common practice, no source)', () => {
  const party = {
    arrivesAt: utc('2026-06-13T13:00:00'),
    leavesAt: utc('2026-06-20T08:00:00'),
    ashoreAt: null,
  };
  const next = {
    arrivesAt: utc('2026-06-20T13:00:00'),
    leavesAt: utc('2026-06-27T08:00:00'),
    ashoreAt: null,
  };

  test("an hour after the party leaves: Saturday 11:00 when it leaves at 10:00 ship's time", () => {
    const plan = planNext(asked({ audience: 'guest', over: { parties: [party, next] } }));
    expect(plan.dueAt).toEqual(utc('2026-06-20T09:00:00'));
    expect(plan.reasons).toEqual([{ code: 'party_departure', at: '2026-06-20T08:00:00.000Z' }]);
  });

  test('before the next arrival, and never before the party has left', () => {
    const soon = { ...next, arrivesAt: utc('2026-06-20T08:40:00') };
    expect(planNext(asked({ audience: 'guest', over: { parties: [party, soon] } })).dueAt).toEqual(
      utc('2026-06-20T08:20:00'),
    );
    const atOnce = { ...next, arrivesAt: utc('2026-06-20T08:00:00') };
    expect(planNext(asked({ audience: 'guest', over: { parties: [party, atOnce] } })).dueAt).toEqual(
      utc('2026-06-20T08:00:00'),
    );
  });

  test('not while another party is aboard, however many come and go', () => {
    const staying = {
      arrivesAt: utc('2026-06-19T13:00:00'),
      leavesAt: utc('2026-06-22T08:00:00'),
      ashoreAt: null,
    };
    const plan = planNext(asked({ audience: 'guest', over: { parties: [party, staying] } }));
    expect(plan.dueAt).toEqual(utc('2026-06-22T09:00:00'));
    expect(plan.reasons[0]).toMatchObject({ code: 'party_departure' });
  });

  test('a departure shortly before the age limit is better than the night before it', () => {
    const shortly = { ...party, leavesAt: utc('2026-07-01T08:00:00') };
    const plan = planNext(asked({ audience: 'guest', over: { parties: [shortly] } }));
    expect(plan.dueAt).toEqual(utc('2026-07-01T09:00:00'));
    expect(plan.deadlineAt).toEqual(utc('2026-07-01T10:00:00'));
  });

  test('a party marked ashore early moves it up; what is left of it is exposed', () => {
    const now = utc('2026-06-20T06:30:00');
    const early = { ...party, ashoreAt: utc('2026-06-20T06:00:00') };
    const plan = planNext(
      asked({
        audience: 'guest',
        over: {
          parties: [early, next],
          now,
          exposures: [{ kind: 'departed_guest', at: utc('2026-06-20T06:00:00') }],
        },
      }),
    );
    expect(plan.dueAt).toEqual(utc('2026-06-20T07:00:00'));
    expect(plan.reasons[0]).toEqual({ code: 'departed_guest', at: '2026-06-20T06:00:00.000Z' });
  });

  test('one guest leaves while the others stay: the next quiet hour', () => {
    const plan = planNext(
      asked({
        audience: 'guest',
        over: {
          parties: [party, next],
          exposures: [{ kind: 'departed_guest', at: utc('2026-06-14T12:00:00') }],
        },
      }),
    );
    expect(local([zone('Europe/Zagreb')], plan.dueAt)).toBe('2026-06-15T02:00');
    expect(plan.deadlineAt).toEqual(utc('2026-06-16T12:00:00'));
  });

  test('the age limit comes first when no party leaves before it', () => {
    const long = { ...party, leavesAt: utc('2026-08-01T08:00:00') };
    const plan = planNext(asked({ audience: 'guest', over: { parties: [long] } }));
    expect(local([zone('Europe/Zagreb')], plan.dueAt)).toBe('2026-07-01T02:00');
    expect(plan.deadlineAt).toEqual(utc('2026-07-01T10:00:00'));
    expect(plan.reasons[0]).toMatchObject({ code: 'age_limit', days: 30 });
  });
});

describe('crew network', () => {
  test("Tuesday a deckhand signs off: Wednesday's quiet hour", () => {
    const plan = planNext(
      asked({
        over: {
          now: utc('2026-06-16T15:00:00'),
          exposures: [{ kind: 'sign_off', at: utc('2026-06-16T14:30:00') }],
        },
      }),
    );
    expect(local([zone('Europe/Zagreb')], plan.dueAt)).toBe('2026-06-17T02:00');
    expect(plan.reasons).toEqual([{ code: 'sign_off', at: '2026-06-16T14:30:00.000Z' }]);
  });

  test('inside quiet hours it is now, to the next five minutes', () => {
    const plan = planNext(
      asked({
        over: {
          now: utc('2026-06-17T00:41:10'),
          exposures: [{ kind: 'leak', at: utc('2026-06-17T00:40:00') }],
        },
      }),
    );
    expect(plan.dueAt).toEqual(utc('2026-06-17T00:45:00'));
  });

  test('not around an arrival', () => {
    const parties = [
      { arrivesAt: utc('2026-06-17T01:00:00'), leavesAt: utc('2026-06-24T08:00:00'), ashoreAt: null },
    ];
    const plan = planNext(
      asked({
        over: {
          parties,
          now: utc('2026-06-16T15:00:00'),
          exposures: [{ kind: 'sign_off', at: utc('2026-06-16T14:30:00') }],
        },
      }),
    );
    expect(local([zone('Europe/Zagreb')], plan.dueAt)).toBe('2026-06-18T02:00');
  });

  test('what the policy does not move up for leaves the plan alone', () => {
    const plan = planNext(
      asked({
        policy: { onSignOff: false },
        over: { exposures: [{ kind: 'sign_off', at: utc('2026-06-14T12:00:00') }] },
      }),
    );
    expect(local([zone('Europe/Zagreb')], plan.dueAt)).toBe('2026-07-01T02:00');
  });

  test('an exposure never makes it later', () => {
    for (const kind of ['sign_off', 'lost_card', 'leak', 'departed_guest'] as const) {
      for (let hour = 0; hour < 24 * 40; hour += 7) {
        const now = new Date(utc('2026-06-01T11:00:00').getTime() + hour * 3_600_000);
        const before = planNext(asked({ over: { now } })).dueAt.getTime();
        const after = planNext(asked({ over: { now, exposures: [{ kind, at: now }] } })).dueAt.getTime();
        expect(after).toBeLessThanOrEqual(before);
      }
    }
  });

  test('overdue: the next quiet hour, with the delay stated', () => {
    const plan = planNext(asked({ over: { now: utc('2026-07-20T15:00:00') } }));
    expect(local([zone('Europe/Zagreb')], plan.dueAt)).toBe('2026-07-21T02:00');
    expect(plan.reasons[1]).toEqual({ code: 'overdue', since: '2026-07-01T10:00:00.000Z' });
  });

  test('cancelled by a person: put off twelve hours at least', () => {
    const first = planNext(asked({}));
    const second = planNext(
      asked({
        over: { putOffFrom: first.dueAt, used: new Set([first.occurrence]), now: utc('2026-06-30T12:00:00') },
      }),
    );
    expect(second.dueAt.getTime()).toBeGreaterThanOrEqual(first.dueAt.getTime() + PUT_OFF_MS);
    expect(second.reasons.map(({ code }) => code)).toEqual(['age_limit', 'overdue', 'put_off']);
  });
});

describe('owner network and networks with equipment', () => {
  const trip = {
    kind: 'owner_trip',
    startsAt: utc('2026-06-25T08:00:00'),
    endsAt: utc('2026-07-05T08:00:00'),
  };
  test('not while the owner is aboard: the last quiet hour before the trip', () => {
    const plan = planNext(asked({ audience: 'owner', over: { voyages: [trip] } }));
    expect(local([zone('Europe/Zagreb')], plan.dueAt)).toBe('2026-06-25T02:00');
  });

  test('aboard already: after the trip, and the delay is stated', () => {
    const plan = planNext(
      asked({ audience: 'owner', over: { voyages: [trip], now: utc('2026-06-26T12:00:00') } }),
    );
    expect(local([zone('Europe/Zagreb')], plan.dueAt)).toBe('2026-07-06T02:00');
    expect(plan.reasons.map(({ code }) => code)).toEqual(['age_limit', 'overdue', 'owner_aboard']);
  });

  test("its innocent neighbour, the crew network, does not wait for the owner's trip", () => {
    expect(local([zone('Europe/Zagreb')], planNext(asked({ over: { voyages: [trip] } })).dueAt)).toBe(
      '2026-07-01T02:00',
    );
  });

  test('equipment: never during a crossing, not even when exposed', () => {
    const crossing = {
      kind: 'crossing',
      startsAt: utc('2026-06-14T06:00:00'),
      endsAt: utc('2026-06-19T18:00:00'),
    };
    const exposures = [{ kind: 'leak' as const, at: utc('2026-06-14T12:00:00') }];
    const plan = planNext(asked({ equipment: true, over: { voyages: [crossing], exposures } }));
    expect(local([zone('Europe/Zagreb')], plan.dueAt)).toBe('2026-06-20T02:00');
    expect(plan.reasons.map(({ code }) => code)).toEqual(['leak', 'overdue', 'crossing']);
    const without = planNext(asked({ over: { voyages: [crossing], exposures } }));
    expect(local([zone('Europe/Zagreb')], without.dueAt)).toBe('2026-06-15T02:00');
  });
});

describe("ship's time (R50; instants from `zdump -v`, tzdata 2025b; rule: RFC 5545 section 3.3.5)", () => {
  const cases: [string, string, string, string][] = [
    ['Europe/Paris', 'the day before the gap', '2026-03-28T02:30', '2026-03-28T01:30:00'],
    ['Europe/Paris', 'the gap: the offset before it', '2026-03-29T02:30', '2026-03-29T01:30:00'],
    ['Europe/Paris', 'the day after the gap', '2026-03-30T02:30', '2026-03-30T00:30:00'],
    ['Europe/Paris', 'the overlap: the first one', '2026-10-25T02:30', '2026-10-25T00:30:00'],
    ['Europe/Paris', '2027, gap', '2027-03-28T02:30', '2027-03-28T01:30:00'],
    ['Europe/Paris', '2027, overlap', '2027-10-31T02:30', '2027-10-31T00:30:00'],
    ['America/New_York', 'gap', '2026-03-08T02:30', '2026-03-08T07:30:00'],
    ['America/New_York', 'overlap', '2026-11-01T01:30', '2026-11-01T05:30:00'],
    ['America/Nassau', 'has the same changes as New York', '2026-03-08T02:30', '2026-03-08T07:30:00'],
    ['America/Puerto_Rico', 'has none', '2026-03-08T02:30', '2026-03-08T06:30:00'],
    ['America/Antigua', 'has none', '2026-03-08T02:30', '2026-03-08T06:30:00'],
    ['America/St_Thomas', 'has none', '2026-03-08T02:30', '2026-03-08T06:30:00'],
    ['Asia/Dubai', 'has none', '2026-03-29T02:30', '2026-03-28T22:30:00'],
    ['Europe/Athens', 'gap', '2026-03-29T03:30', '2026-03-29T01:30:00'],
  ];
  test.each(cases)('%s, %s: %s is %sZ', (name, _what, text, expected) => {
    expect(shipInstant([zone(name)], Temporal.PlainDateTime.from(text))).toEqual(utc(expected));
  });

  test.each([
    ['Europe/Paris', '2026-03-29', '2026-03-29T01:30:00'],
    ['Europe/Paris', '2026-10-25', '2026-10-25T00:30:00'],
    ['America/New_York', '2026-03-08', '2026-03-08T07:30:00'],
  ])('quiet hours from 02:30 in %s on %s start once, at %sZ', (name, date, expected) => {
    const day = utc(`${date}T12:00:00`);
    const input = asked({
      policy: { ageLimitDays: 10, quietHours: [{ days: [1, 2, 3, 4, 5, 6, 7], from: '02:30', to: '05:00' }] },
      over: {
        zones: [zone(name)],
        liveAt: new Date(day.getTime() - 10 * 86_400_000),
        now: new Date(day.getTime() - 5 * 86_400_000),
      },
    });
    expect(planNext(input).dueAt).toEqual(utc(expected));
  });

  test('quiet hours that pass midnight belong to the weekday they start on', () => {
    const saturdayNight = [{ days: [6], from: '23:00', to: '04:00' }];
    const sunday = asked({
      policy: { quietHours: saturdayNight },
      over: {
        now: utc('2026-06-21T00:10:00'),
        exposures: [{ kind: 'leak', at: utc('2026-06-21T00:00:00') }],
      },
    });
    expect(local(sunday.zones, planNext(sunday).dueAt)).toBe('2026-06-21T02:10');
    const after = asked({
      policy: { quietHours: saturdayNight },
      over: {
        now: utc('2026-06-21T02:10:00'),
        exposures: [{ kind: 'leak', at: utc('2026-06-21T02:00:00') }],
      },
    });
    expect(local(after.zones, planNext(after).dueAt)).toBe('2026-06-27T23:00');
  });

  test('no quiet hours at all means any time', () => {
    const plan = planNext(
      asked({
        policy: { quietHours: [] },
        over: { exposures: [{ kind: 'leak', at: utc('2026-06-14T12:00:00') }] },
      }),
    );
    expect(plan.dueAt).toEqual(utc('2026-06-14T12:15:00'));
  });

  test('a vessel that changes its zone keeps one quiet hour for every local date: never none, never two', () => {
    // Eastward over the date a whole hour of ship's clock is skipped; westward it comes twice.
    for (const [first, second] of [
      ['Europe/Lisbon', 'Europe/Athens'],
      ['Europe/Athens', 'Europe/Lisbon'],
      ['Pacific/Apia', 'Pacific/Honolulu'],
      ['Pacific/Honolulu', 'Pacific/Apia'],
    ] as const) {
      const zones = [zone(first), zone(second, '2026-06-10T01:30:00')];
      const starts = Array.from({ length: 10 }, (_, day) =>
        shipInstant(
          zones,
          Temporal.PlainDateTime.from({ year: 2026, month: 6, day: 5 + day, hour: 2 }),
        ).getTime(),
      );
      expect(new Set(starts).size).toBeGreaterThanOrEqual(9);
      expect([...starts].sort((one, other) => one - other)).toEqual(starts);
    }
  });

  test('every zone that changes its clocks within two years: 02:30 of each Sunday exists once and in order', () => {
    const zones = Intl.supportedValuesOf('timeZone');
    let changes = 0;
    for (const name of zones) {
      const spans = [zone(name)];
      let previous = 0;
      for (let week = 0; week < 104; week += 1) {
        const wanted = Temporal.PlainDate.from('2026-01-04').add({ weeks: week }).toPlainDateTime('02:30');
        const at = shipInstant(spans, wanted).getTime();
        const step = at - previous;
        if (previous !== 0) {
          expect(step).toBeGreaterThan(6 * 86_400_000);
          expect(step).toBeLessThan(8 * 86_400_000);
          if (step !== 7 * 86_400_000) changes += 1;
        }
        previous = at;
      }
    }
    expect(changes).toBeGreaterThan(100);
  }, 60_000);

  test('planned 30, 90 and 400 days ahead it is still the last quiet hour before the limit', () => {
    for (const ageLimitDays of [30, 90, 400]) {
      const input = asked({ policy: { ageLimitDays } });
      const plan = planNext(input);
      const room = plan.deadlineAt.getTime() - plan.dueAt.getTime();
      expect(room).toBeGreaterThanOrEqual(0);
      expect(room).toBeLessThanOrEqual(25 * 3_600_000);
      expect(local(input.zones, plan.dueAt).slice(11)).toBe('02:00');
    }
  });

  test('the same question has the same answer, and the same occurrence', () => {
    expect(planNext(asked({}))).toEqual(planNext(asked({})));
    expect(planNext(asked({})).occurrence).toBe('age 2026-07-01T02:00 Europe/Zagreb +02:00');
  });
});
