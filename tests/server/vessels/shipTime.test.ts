import { describe, expect, test } from 'vitest';
import { aboard } from '../../support/aboard.ts';
import { useApp } from '../../support/app.ts';

const app = useApp();
const { make, as } = aboard(app);

describe("ship's time", () => {
  test('changes zone from a local time on, read on the clock in force before it', async () => {
    const vesselId = await make.vessel({ zone: 'Europe/Zagreb' });
    const captain = await as(vesselId, 'captain');
    const added = await captain
      .post(`/vessels/${vesselId}/zones`, { zone: 'Europe/Athens', fromLocal: '2026-06-20T02:00' })
      .expect(201);
    // 02:00 in Zagreb in summer is 00:00 UTC.
    expect(
      added.body.zones.map(({ zone, fromAt }: { zone: string; fromAt: string }) => [zone, fromAt]),
    ).toEqual([
      ['Europe/Zagreb', '2020-01-01T00:00:00.000Z'],
      ['Europe/Athens', '2026-06-20T00:00:00.000Z'],
    ]);
    app.clock.set('2026-06-20T00:00:01Z');
    const late = await as(vesselId, 'captain');
    expect((await late.get(`/vessels/${vesselId}`)).body.zone).toBe('Europe/Athens');
    const [first, second] = added.body.zones;
    const stays = await late.delete(`/vessels/${vesselId}/zones/${first.id}`).expect(409);
    expect(stays.body.detail).toContain('The first zone stays');
    const left = await late.delete(`/vessels/${vesselId}/zones/${second.id}`).expect(200);
    expect(left.body.zones).toHaveLength(1);
  });

  test('a local time the clocks skip is read with the offset before the gap (RFC 5545 section 3.3.5)', async () => {
    const vesselId = await make.vessel({ zone: 'Europe/Paris' });
    const captain = await as(vesselId, 'captain');
    const gap = await captain
      .post(`/vessels/${vesselId}/zones`, { zone: 'Europe/Athens', fromLocal: '2027-03-28T02:30' })
      .expect(201);
    expect(gap.body.zones[1].fromAt).toBe('2027-03-28T01:30:00.000Z');
  });

  test('a local time the clocks repeat is the first of the two (RFC 5545 section 3.3.5)', async () => {
    const vesselId = await make.vessel({ zone: 'America/New_York' });
    const captain = await as(vesselId, 'captain');
    const overlap = await captain
      .post(`/vessels/${vesselId}/zones`, { zone: 'America/Nassau', fromLocal: '2026-11-01T01:30' })
      .expect(201);
    expect(overlap.body.zones[1].fromAt).toBe('2026-11-01T05:30:00.000Z');
  });

  test('refuses what is no zone and what is no date, and the same moment twice', async () => {
    const vesselId = await make.vessel();
    const captain = await as(vesselId, 'captain');
    const zones = `/vessels/${vesselId}/zones`;
    for (const zone of ['Europe/Atlantis', '+02:00', "Europe/Paris'--"]) {
      const answer = await captain.post(zones, { zone, fromLocal: '2026-07-01T02:00' }).expect(422);
      expect(answer.body.errors.zone[0]).toContain('IANA');
    }
    const zero = await captain
      .post(zones, { zone: 'Europe/Paris\u0000', fromLocal: '2026-07-01T02:00' })
      .expect(422);
    expect(zero.body.errors.zone[0]).toContain('zero character');
    for (const fromLocal of ['2026-02-30T02:00', '2026-06-20T24:00', '2026-13-01T00:00']) {
      const answer = await captain.post(zones, { zone: 'Europe/Athens', fromLocal }).expect(422);
      expect(answer.body.errors.fromLocal[0]).toContain('no such date');
    }
    await captain.post(zones, { zone: 'Europe/Athens', fromLocal: '2026-07-01T02:00' }).expect(201);
    const again = await captain
      .post(zones, { zone: 'Asia/Dubai', fromLocal: '2026-07-01T02:00' })
      .expect(422);
    expect(Object.keys(again.body.errors)).toEqual(['fromLocal']);
  });
});
