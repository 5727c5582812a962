import { describe, expect, test } from 'vitest';
import type { NetworkView } from '../../../../shared/api/networks.ts';
import type { RotationSummary } from '../../../../shared/api/rotations.ts';
import { matterOf, worstOf } from '../../../../src/features/networks/NetworksSentence.tsx';

const now = new Date('2026-06-14T12:00:00Z');

const change = (given: Partial<RotationSummary>): RotationSummary => ({
  id: 'change',
  networkId: 'network',
  ssid: 'Tamarisk Crew',
  audience: 'crew',
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
  of: 4,
  ...given,
});

const network = (given: Partial<NetworkView>): NetworkView => ({
  id: 'network',
  ssid: 'Tamarisk Crew',
  audience: 'crew',
  security: 'wpa2',
  hidden: false,
  carriesEquipment: false,
  note: null,
  cautions: [],
  policy: {
    ageLimitDays: 45,
    leastBits: 64,
    words: 5,
    quietHours: [],
    onPartyDeparture: false,
    onSignOff: true,
    onLostCard: true,
    onLeak: true,
  },
  live: {
    passphraseId: 'passphrase',
    generation: 1,
    origin: 'generated',
    liveAt: '2026-06-01T09:00:00Z',
    ageDays: 13,
    grade: 'strong',
    strength: '',
  },
  standing: 'in_order',
  holders: { current: 3, departed: 0 },
  leaks: [],
  change: change({}),
  drift: null,
  may: { plan: true, reveal: true, edit: true, policy: true, typeIn: true },
  ...given,
});

// The order is the project's own: what keeps people out first, then who may come in, then age (guard.md section 3.3, job.md "Words").
describe('what of a network most needs saying', () => {
  test.each([
    ['in order', network({}), null],
    ['exposed', network({ standing: 'exposed' }), 'exposed'],
    ['past its limit', network({ standing: 'overdue' }), 'overdue'],
    ['in order, yet easy to guess', network({ live: { ...liveOf(network({})), grade: 'weak' } }), 'weak'],
    ['without a passphrase on record', network({ live: null, standing: 'due' }), 'unrecorded'],
    ['not yet known, never rounded up', network({ change: change({ state: 'unknown' }) }), 'unknown'],
    ['waiting for somebody', network({ change: change({ state: 'needs_somebody' }) }), 'needs_somebody'],
    ['restored and being checked', network({ change: change({ state: 'reconciling' }) }), 'needs_somebody'],
    ['drifted', network({ drift: change({ state: 'drifted' }) }), 'drifted'],
    [
      'ready and due, to be entered by hand',
      network({ change: change({ state: 'staged', dueAt: '2026-06-14T11:59:00Z' }) }),
      'waiting',
    ],
    [
      'going back, which has started although it is only staged',
      network({
        change: change({
          state: 'staged',
          dueAt: '2026-06-14T12:30:00Z',
          reasons: [{ code: 'going_back', ticket: 3 }],
        }),
      }),
      'under_way',
    ],
  ])('%s', (_, given, matter) => {
    expect(matterOf(given, now)).toBe(matter);
  });

  test('the worst comes first, and none where all are in order', () => {
    const exposed = network({ id: 'exposed', standing: 'exposed' });
    const unknown = network({ id: 'unknown', change: change({ state: 'unknown' }) });
    expect(worstOf([network({}), exposed, unknown], now)?.id).toBe('unknown');
    expect(worstOf([network({})], now)).toBeNull();
  });
});

function liveOf({ live }: NetworkView): NonNullable<NetworkView['live']> {
  if (live === null) throw new Error('This network has a passphrase in force.');
  return live;
}
