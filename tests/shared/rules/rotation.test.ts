import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  isDisclosed,
  mayPurge,
  PURGE_AFTER_MS,
  ROTATION_STEPS,
  type Rotation,
  toTry,
} from '../../../shared/rules/rotation.ts';
import { step } from '../../../shared/rules/rotationStep.ts';
import { type Command, POINTS, RULES, type Rules, World } from '../../support/rotationWorld.ts';

const at = new Date('2026-06-14T11:00:00Z');
const base: Rotation = {
  state: 'planned',
  mode: 'graceful',
  driver: 'rehearsal',
  ticket: null,
  from: 'old',
  to: null,
  dueAt: at,
  takesOver: false,
  handedOutAt: null,
  reportBy: null,
  targets: [],
  ways: [],
  waivedBy: null,
  detail: null,
};
const staged: Rotation = {
  ...base,
  state: 'staged',
  ticket: { epoch: 1, number: 7 },
  to: 'new',
  targets: [...POINTS].map((accessPointId) => ({ accessPointId, seen: null, evidence: null })),
};
const handedOut: Rotation = {
  ...staged,
  state: 'handed_out',
  handedOutAt: at,
  reportBy: new Date(at.getTime() + 900_000),
};

const point = fc.constantFrom(...POINTS);
const command: fc.Arbitrary<Command> = fc.oneof(
  fc.constantFrom('plan', 'stage', 'handOut', 'disclose', 'begin').map((one) => ({ do: one }) as Command),
  fc.constantFrom('cancel', 'missing', 'giveUp', 'purge').map((one) => ({ do: one }) as Command),
  fc.record({ do: fc.constant('wait' as const), days: fc.integer({ min: 0, max: 9 }) }),
  fc.record({ do: fc.constant('deliver' as const), which: fc.nat(9) }),
  fc.record({ do: fc.constant('receive' as const), which: fc.nat(9) }),
  fc.record({ do: fc.constantFrom('apply' as const, 'report' as const), point }),
);

const told = (seen: (typeof POINTS)[number]): Command[] => [
  { do: 'apply', point: seen },
  { do: 'report', point: seen },
  { do: 'receive', which: 0 },
];
/** Stretches in which things go well, so that the search gets past them. */
const stretch: fc.Arbitrary<Command[]> = fc.oneof(
  { weight: 8, arbitrary: command.map((one) => [one]) },
  {
    weight: 2,
    arbitrary: fc.constant<Command[]>([
      { do: 'plan' },
      { do: 'stage' },
      { do: 'handOut' },
      { do: 'disclose' },
      { do: 'begin' },
      { do: 'deliver', which: 0 },
    ]),
  },
  { weight: 1, arbitrary: point.map(told) },
  { weight: 1, arbitrary: fc.constant(POINTS.flatMap(told)) },
);
const days = (minLength: number) =>
  fc.array(stretch, { minLength, maxLength: 30, size: 'max' }).map((list) => list.flat());

/** Random days at sea; answers the first invariant broken with its shortest sequence, or null. */
function search(rules: Rules, numRuns: number): string | null {
  const property = fc.property(days(1), (commands) => {
    const world = new World(rules);
    for (const one of commands) {
      world.take(one);
      if (world.violation) throw new Error(world.violation);
    }
  });
  const result = fc.check(property, { numRuns, seed: 20_260_614, endOnFailure: false });
  return result.failed
    ? String(result.errorInstance instanceof Error ? result.errorInstance.message : 'failed')
    : null;
}

describe('the rules at sea (guard section 3: I1, I2, I3, I5, D1; R52, R57)', () => {
  test('500 and more random sequences break nothing', () => {
    expect(search(RULES, 4000)).toBeNull();
  });

  test('changes do come into force in them', () => {
    let came = 0;
    fc.assert(
      fc.property(days(10), (commands) => {
        const world = new World(RULES);
        for (const one of commands) world.take(one);
        if (world.live !== 'code-1') came += 1;
      }),
      { numRuns: 2000, seed: 7 },
    );
    expect(came).toBeGreaterThan(200);
  });
});

/** Natural shortcuts, each of which some sequence must catch (guard section 3.6). */
const MUTANTS: Record<string, { rules: Rules; broken: RegExp }> = {
  'mark in force when handed out': {
    broken: /I2|I3/,
    rules: with_((rotation, action, now) => {
      const outcome = step(rotation, action, now);
      return outcome.ok && action.kind === 'handOut'
        ? { ...outcome, next: { ...outcome.next, state: 'live' } }
        : outcome;
    }),
  },
  'show only the new passphrase after hand-out': { broken: /I2/, rules: { ...RULES, toTry: () => ['new'] } },
  'forget the old passphrase at once': { broken: /I1/, rules: { ...RULES, mayPurge: () => true } },
  'a new passphrase on a timeout': {
    broken: /I2|I5/,
    rules: with_((rotation, action, now) => {
      const outcome = step(rotation, action, now);
      return outcome.ok && action.kind === 'reportMissing'
        ? { ...outcome, next: { ...outcome.next, to: 'another' } }
        : outcome;
    }),
  },
  'cancel after hand-out': {
    broken: /I2|I3/,
    rules: with_((rotation, action, now) =>
      action.kind === 'cancel'
        ? { ok: true, next: { ...rotation, state: 'cancelled' }, through: ['cancelled'] }
        : step(rotation, action, now),
    ),
  },
  'one verified access point is enough': {
    broken: /I2|I3/,
    rules: with_((rotation, action, now) => {
      const outcome = step(rotation, action, now);
      return outcome.ok && action.kind === 'observe' && action.seen === 'new'
        ? { ...outcome, next: { ...outcome.next, state: 'live' } }
        : outcome;
    }),
  },
  'accept reports without looking at the ticket': {
    broken: /I2|I3/,
    rules: with_((rotation, action, now) =>
      step(
        rotation,
        action.kind === 'observe' && rotation.ticket ? { ...action, ticket: rotation.ticket } : action,
        now,
      ),
    ),
  },
  'no fencing number': { broken: /I2|I3/, rules: { ...RULES, fencing: false } },
  'start before two ways aboard are confirmed': {
    broken: /D1/,
    rules: with_((rotation, action, now) =>
      action.kind === 'begin' && rotation.state === 'handed_out'
        ? { ok: true, next: { ...rotation, state: 'applying' }, through: ['applying'] }
        : step(rotation, action, now),
    ),
  },
};

function with_(wrapped: typeof step): Rules {
  return { ...RULES, step: wrapped };
}

describe('shortcuts are caught', () => {
  test.each(Object.entries(MUTANTS))('%s', (_name, { rules, broken }) => {
    expect(search(rules, 20_000)).toMatch(broken);
  });
});

describe('single rules', () => {
  test('cancel only before anything left; the refusal says what to do instead', () => {
    expect(step(base, { kind: 'cancel' }, at)).toMatchObject({ ok: true, through: ['cancelled'] });
    expect(step(staged, { kind: 'cancel' }, at)).toMatchObject({ ok: true, through: ['cancelled'] });
    const refused = step(handedOut, { kind: 'cancel' }, at);
    expect(refused).toMatchObject({ ok: false, code: 'not_now' });
    expect(refused.ok ? '' : refused.sentence).toContain('Give it up instead');
  });

  test('giving up needs a higher number, or a newer epoch', () => {
    const supersede = (epoch: number, number: number) =>
      step(handedOut, { kind: 'supersede', by: { epoch, number } }, at).ok;
    expect([supersede(1, 6), supersede(1, 7), supersede(1, 8), supersede(2, 1), supersede(0, 9)]).toEqual([
      false,
      false,
      true,
      true,
      false,
    ]);
    expect(step(staged, { kind: 'supersede', by: { epoch: 1, number: 8 } }, at).ok).toBe(false);
  });

  test('a single access point goes through applying to live; E0 (sent) is not enough', () => {
    const one = { ...handedOut, targets: handedOut.targets.slice(0, 1) };
    const seen = {
      kind: 'observe',
      ticket: { epoch: 1, number: 7 },
      accessPointId: 'salon',
      seen: 'new',
    } as const;
    expect(step(one, { ...seen, evidence: 'E1' }, at)).toMatchObject({
      ok: true,
      through: ['applying', 'live'],
    });
    expect(step(one, { ...seen, evidence: 'E0' }, at)).toMatchObject({ ok: true, through: ['applying'] });
  });

  test('sent again says less than read back', () => {
    const seen = {
      kind: 'observe',
      ticket: { epoch: 1, number: 7 },
      accessPointId: 'salon',
      seen: 'new',
    } as const;
    const once = step(handedOut, { ...seen, evidence: 'E2' }, at);
    const again = once.ok ? step(once.next, { ...seen, evidence: 'E0' }, at) : once;
    expect(again.ok && again.next.targets[0]?.evidence).toBe('E2');
  });

  test.each([[{ epoch: 1, number: 6 }], [{ epoch: 1, number: 8 }], [{ epoch: 2, number: 7 }]])(
    'a report for %j is about another change',
    (ticket) => {
      const outcome = step(
        handedOut,
        { kind: 'observe', ticket, accessPointId: 'salon', seen: 'new', evidence: 'E1' },
        at,
      );
      expect(outcome).toMatchObject({ ok: false, code: 'stale' });
    },
  );

  test('two independent ways: the journal and one of card, officer, kiosk; by hand the open sheet (D1)', () => {
    const ways = (driver: Rotation['driver'], ...list: Rotation['ways']) =>
      isDisclosed({ driver, ways: list });
    expect(ways('rehearsal', 'journal')).toBe(false);
    expect(ways('rehearsal', 'card', 'officer', 'kiosk')).toBe(false);
    expect(ways('rehearsal', 'journal', 'card')).toBe(true);
    expect(ways('rehearsal', 'journal', 'officer')).toBe(true);
    expect(ways('rehearsal', 'journal', 'kiosk')).toBe(true);
    expect(ways('by_hand', 'card')).toBe(false);
    expect(ways('by_hand', 'officer')).toBe(true);
  });

  test('only an urgent change with a named person starts without them', () => {
    expect(step(handedOut, { kind: 'begin' }, at).ok).toBe(false);
    expect(step(handedOut, { kind: 'waive', by: 'captain' }, at).ok).toBe(false);
    const urgent: Rotation = { ...handedOut, mode: 'urgent' };
    expect(step(urgent, { kind: 'begin' }, at).ok).toBe(false);
    const waived = step(urgent, { kind: 'waive', by: 'captain' }, at);
    expect(waived.ok && step(waived.next, { kind: 'begin' }, at)).toMatchObject({
      ok: true,
      through: ['applying'],
    });
  });

  test('not known only after its time, and never another passphrase', () => {
    expect(step(handedOut, { kind: 'reportMissing' }, at).ok).toBe(false);
    const late = step(handedOut, { kind: 'reportMissing' }, new Date(at.getTime() + 900_000));
    expect(late).toMatchObject({ ok: true, through: ['unknown'] });
    expect(late.ok && late.next.to).toBe('new');
    expect(late.ok && toTry(late.next, at)).toEqual(['new', 'old']);
    const again =
      late.ok &&
      step(late.next, { kind: 'stage', ticket: { epoch: 1, number: 8 }, to: 'x', targets: ['a'] }, at);
    expect(again).toMatchObject({ ok: false });
  });

  test('handed out before it is due, the old one is tried first; afterwards the new one', () => {
    const ahead = { ...handedOut, dueAt: new Date(at.getTime() + 3_600_000) };
    expect(toTry(ahead, at)).toEqual(['old', 'new']);
    expect(toTry(ahead, ahead.dueAt)).toEqual(['new', 'old']);
  });

  test('a retired passphrase is kept until its time is up and every access point is proven', () => {
    const live: Rotation = {
      ...handedOut,
      state: 'live',
      targets: [...POINTS].map((accessPointId) => ({ accessPointId, seen: 'new', evidence: 'E1' })),
    };
    const later = new Date(at.getTime() + PURGE_AFTER_MS);
    expect(mayPurge(at, live, false, later)).toBe(true);
    expect(mayPurge(at, live, false, new Date(later.getTime() - 1))).toBe(false);
    expect(mayPurge(at, live, true, later)).toBe(false);
    expect(mayPurge(at, { ...live, state: 'drifted' }, false, later)).toBe(false);
    expect(mayPurge(at, { ...live, targets: [] }, false, later)).toBe(false);
    expect(mayPurge(at, null, false, later)).toBe(false);
  });

  test('from every state that is not over, a verified one can be reached (D3)', () => {
    const ends = ['retired', 'cancelled', 'superseded'];
    const reaches = (state: keyof typeof ROTATION_STEPS, seen = new Set<string>()): boolean =>
      state === 'live' ||
      ROTATION_STEPS[state].some((next) => {
        if (seen.has(next)) return false;
        seen.add(next);
        return reaches(next, seen);
      });
    for (const state of Object.keys(ROTATION_STEPS) as (keyof typeof ROTATION_STEPS)[]) {
      expect([state, reaches(state)]).toEqual([state, !ends.includes(state)]);
    }
  });
});
