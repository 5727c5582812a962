import { describe, expect, test } from 'vitest';
import { aboard } from '../../support/aboard.ts';
import { useApp } from '../../support/app.ts';

const app = useApp();
const { make, as, ago } = aboard(app);

describe('a policy', () => {
  const RULES = {
    ageLimitDays: 30,
    leastBits: 64,
    words: 6,
    quietHours: [{ days: [6, 7], from: '23:00', to: '04:00' }],
    onPartyDeparture: false,
    onSignOff: true,
    onLostCard: true,
    onLeak: true,
  };

  test('is the captain’s, with a fresh proof, and moves the plan at once', async () => {
    const vesselId = await make.vessel({ zone: 'Europe/Zagreb' });
    await make.accessPoint(vesselId, 'Salon');
    const { id } = await make.network(vesselId, {
      audience: 'crew',
      live: 'a-passphrase-in-force',
      liveAt: ago(5),
    });
    const path = `/vessels/${vesselId}/networks/${id}/policy`;
    const captain = await as(vesselId, 'captain');
    const set = await captain.put(path, RULES).expect(200);
    expect(set.body.policy).toEqual(RULES);
    // Live since 9 June 14:12 in Zagreb: thirty days end on Thursday 9 July. The last weekend night before
    // begins on Sunday 5 July 23:00, and ends on Monday at 04:00.
    expect(set.body.change.dueAt >= '2026-07-05T21:00:00.000Z').toBe(true);
    expect(set.body.change.dueAt <= '2026-07-06T02:00:00.000Z').toBe(true);
    await (await as(vesselId, 'eto')).put(path, RULES).expect(403);
    await (await as(vesselId, 'chief_stew')).put(path, RULES).expect(403);
    app.clock.advance(11 * 60_000);
    expect((await captain.put(path, RULES).expect(403)).body.code).toBe('step_up');
  });

  test('boundaries are named: days, bits, words, and quiet hours that begin when they end', async () => {
    const vesselId = await make.vessel();
    const { id } = await make.network(vesselId);
    const captain = await as(vesselId, 'captain');
    const put = (change: object) =>
      captain.put(`/vessels/${vesselId}/networks/${id}/policy`, { ...RULES, ...change });
    for (const good of [
      { ageLimitDays: 1 },
      { ageLimitDays: 730 },
      { words: 5 },
      { words: 8 },
      { quietHours: [] },
    ])
      await put(good).expect(200);
    const bad: [object, string][] = [
      [{ ageLimitDays: 0 }, 'ageLimitDays'],
      [{ ageLimitDays: 731 }, 'ageLimitDays'],
      [{ leastBits: 46 }, 'leastBits'],
      [{ leastBits: 103 }, 'leastBits'],
      [{ words: 4 }, 'words'],
      [{ words: 9 }, 'words'],
      [{ quietHours: [{ days: [1], from: '02:00', to: '02:00' }] }, 'quietHours.0.to'],
      [{ quietHours: [{ days: [], from: '02:00', to: '05:00' }] }, 'quietHours.0.days'],
      [{ quietHours: [{ days: [8], from: '02:00', to: '05:00' }] }, 'quietHours.0.days.0'],
      [{ quietHours: [{ days: [1], from: '24:00', to: '05:00' }] }, 'quietHours.0.from'],
    ];
    for (const [change, field] of bad) {
      const answer = await put(change).expect(422);
      expect(Object.keys(answer.body.errors)).toEqual([field]);
    }
  });
});
