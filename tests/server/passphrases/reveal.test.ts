import { beforeEach, describe, expect, test } from 'vitest';
import { stageAll } from '../../../server/rotations/stage.ts';
import type { Revealed } from '../../../shared/api/passphrases.ts';
import type { Audience } from '../../../shared/rules/permissions.ts';
import { aboard } from '../../support/aboard.ts';
import { useApp } from '../../support/app.ts';
import type { Client } from '../../support/client.ts';
import { readAsNewAndroid } from '../../support/wifiParser.ts';

const app = useApp();
const { make, as, person, look, write, logged } = aboard(app);

async function boat(audience: Audience = 'guest', live: string | null = 'what-is-in-force-now') {
  const vesselId = await make.vessel({ zone: 'Europe/Zagreb' });
  const points = [await make.accessPoint(vesselId, 'Salon'), await make.accessPoint(vesselId, 'Sundeck')];
  const network = await make.network(vesselId, { audience, ...(live === null ? {} : { live }) });
  return { vesselId, points, network, path: `/vessels/${vesselId}/networks/${network.id}` };
}

const show = async (client: Client, path: string): Promise<Revealed['codes']> => {
  const answer = await client.post(`${path}/reveal`);
  expect(answer.status, answer.text).toBe(200);
  return (answer.body as Revealed).codes;
};
const roles = (codes: Revealed['codes']) => codes.map(({ role }) => role);

describe('showing a passphrase', () => {
  test('writes the log and the holder first, and answers what a phone joins with', async () => {
    const { vesselId, network, path } = await boat();
    const purser = await person(vesselId, 'purser', 'Noor Haddad');
    const answer = await purser.client.post(`${path}/reveal`).expect(200);
    expect(answer.headers['cache-control']).toContain('no-store');
    const [code] = (answer.body as Revealed).codes;
    expect(code).toMatchObject({ role: 'in_force', words: 'In force', passphrase: 'what-is-in-force-now' });
    expect(readAsNewAndroid(code?.payload ?? '')).toMatchObject({
      ssid: 'Tamarisk guest',
      password: 'what-is-in-force-now',
    });
    await show(purser.client, path);
    expect(await logged(vesselId)).toEqual(['passphrase.revealed', 'passphrase.revealed']);
    expect(
      await look('SELECT holder_kind, holder_id, through, departed_at FROM holders WHERE network_id = $id', {
        id: network.id,
      }),
    ).toEqual([{ holder_kind: 'person', holder_id: purser.id, through: 'reveal', departed_at: null }]);
    expect(
      await look('SELECT channel FROM handovers WHERE network_id = $id', { id: network.id }),
    ).toHaveLength(1);
  });

  test('R49: nothing is shown when the log cannot be written', async () => {
    const { vesselId, path } = await boat();
    const purser = await as(vesselId, 'purser');
    await show(purser, path);
    // The next number of the chain is taken, as if another server had forked it.
    await write('UPDATE log_heads SET seq = 0 WHERE vessel_id = $vessel', { vessel: vesselId });
    const refused = await purser.post(`${path}/reveal`);
    expect(refused.status).toBeGreaterThanOrEqual(409);
    expect(refused.text).not.toContain('what-is-in-force-now');
    await write('UPDATE log_heads SET seq = 1 WHERE vessel_id = $vessel', { vessel: vesselId });
    await show(purser, path);
  });

  test('who sees which audience’s; the owner’s asks for a fresh proof, the guests’ does not (R13, R14)', async () => {
    const may: Record<Audience, string[]> = {
      owner: ['captain', 'owner_keeper'],
      guest: ['captain', 'chief_stew', 'purser'],
      crew: ['captain', 'chief_stew', 'purser', 'eto', 'crew'],
    };
    for (const audience of ['owner', 'guest', 'crew'] as const) {
      const { vesselId, path } = await boat(audience, `in-force-for-${audience}-only`);
      for (const role of ['captain', 'chief_stew', 'purser', 'eto', 'crew', 'owner_keeper'] as const) {
        const answer = await (await as(vesselId, role)).post(`${path}/reveal`);
        expect([audience, role, answer.status]).toEqual([
          audience,
          role,
          may[audience].includes(role) ? 200 : 403,
        ]);
      }
      const captain = await as(vesselId, 'captain');
      app.clock.advance(11 * 60_000);
      const later = await captain.post(`${path}/reveal`);
      expect(later.status).toBe(audience === 'owner' ? 403 : 200);
      if (audience === 'owner') expect(later.body.code).toBe('step_up');
    }
  });

  test('says what to do where none is on record', async () => {
    const { vesselId, path } = await boat('guest', null);
    const answer = await (await as(vesselId, 'purser')).post(`${path}/reveal`).expect(409);
    expect(answer.body.detail).toContain('let Quayword make one');
    expect(await logged(vesselId)).toEqual([]);
  });
});

describe('which to try, and in which order (I2)', () => {
  beforeEach(() => app.clock.set('2026-06-14T12:12:00Z'));

  test('staged: the one in force, then the coming one with its time, only for who prepares the cards', async () => {
    const { vesselId, network, path } = await boat('crew');
    const stew = await as(vesselId, 'chief_stew');
    const planned = await stew.post(`${path}/rotations`, { dueAt: '2026-06-21T01:00:00Z' }).expect(201);
    expect(roles(await show(stew, path))).toEqual(['in_force']);
    await app.services.db.transaction({ kind: 'system' }, (tx) =>
      stageAll(app.services, tx, [planned.body.id], { now: app.clock.now(), actor: null }),
    );
    const crew = await as(vesselId, 'crew');
    expect(roles(await show(crew, path))).toEqual(['in_force']);
    const codes = await show(stew, path);
    expect(codes.map(({ role, words }) => [role, words])).toEqual([
      ['in_force', 'In force'],
      // 01:00 UTC is 03:00 in Split in summer.
      ['staged', 'From Sun 21 June 03:00, not before'],
    ]);
    expect(codes[1]?.passphrase).not.toBe(codes[0]?.passphrase);
    // An officer who looked it up is a way aboard to learn it (D1).
    expect((await stew.get(`/vessels/${vesselId}/rotations/${planned.body.id}`)).body.ways).toEqual([
      'officer',
    ]);
    expect(
      await look('SELECT count(*)::int AS count FROM handovers WHERE network_id = $id', { id: network.id }),
    ).toEqual([{ count: 3 }]);

    // It stays the same when somebody has to look at it before anything has left for the boat.
    await write("UPDATE rotations SET state = 'needs_somebody' WHERE id = $id", { id: planned.body.id });
    expect(roles(await show(crew, path))).toEqual(['in_force']);
    expect(roles(await show(stew, path))).toEqual(['in_force', 'staged']);
  });

  test('handed out: both, the old one first until it is due, then the new one; confirmed everywhere: the new one alone', async () => {
    const { vesselId, points, path } = await boat('crew');
    const stew = await as(vesselId, 'chief_stew');
    const planned = await stew.post(`${path}/rotations`, { dueAt: '2026-06-14T12:20:00Z' }).expect(201);
    const { id } = planned.body;
    await app.services.db.transaction({ kind: 'system' }, (tx) =>
      stageAll(app.services, tx, [id], { now: app.clock.now(), actor: null }),
    );
    const eto = await as(vesselId, 'eto');
    app.clock.set('2026-06-14T12:15:00Z');
    const sheet = await eto.post(`/vessels/${vesselId}/rotations/${id}/sheet`).expect(200);
    const crew = await as(vesselId, 'crew');
    const early = await show(crew, path);
    expect(roles(early)).toEqual(['old', 'new']);
    app.clock.set('2026-06-14T12:20:00Z');
    const due = await show(crew, path);
    expect(roles(due)).toEqual(['new', 'old']);
    expect(due[0]).toMatchObject({
      passphrase: sheet.body.passphrase,
      words: 'Try this first: the new one. 0 of 2 access points are confirmed on the new one',
    });
    expect(due[1]).toMatchObject({
      passphrase: 'what-is-in-force-now',
      words: 'If that does not work: the old one',
    });

    await write("UPDATE rotations SET state = 'unknown' WHERE id = $id", { id });
    expect((await show(crew, path))[0]?.words).toMatch(/^We do not know yet\. Try this first: the new one/);

    const typed = { typed: sheet.body.passphrase };
    for (const point of points)
      await eto
        .post(`/vessels/${vesselId}/rotations/${id}/access-points/${point}/confirm`, typed)
        .expect(200);
    expect(await show(crew, path)).toMatchObject([
      {
        role: 'in_force',
        passphrase: sheet.body.passphrase,
        words: 'In force, confirmed on 2 of 2 access points',
      },
    ]);

    await eto
      .post(`/vessels/${vesselId}/rotations/${id}/access-points/${points[1]}/drift`, { seen: 'old' })
      .expect(200);
    const drifted = await show(crew, path);
    expect(drifted.map(({ role, passphrase }) => [role, passphrase])).toEqual([
      ['in_force', sheet.body.passphrase],
      ['old', 'what-is-in-force-now'],
    ]);
    expect(drifted[0]?.words).toContain('1 of 2');
    const networks = await eto.get(path).expect(200);
    expect(networks.body.drift).toMatchObject({ id, state: 'drifted', verified: 1, of: 2 });

    // Once the old one is forgotten, what is left is still shown.
    await write(
      `UPDATE passphrase_secrets s SET sealed = NULL FROM rotations r WHERE r.id = $id AND s.passphrase_id = r.from_passphrase_id`,
      { id },
    );
    expect(roles(await show(crew, path))).toEqual(['in_force']);
  });

  test('given up: both from the start of going back', async () => {
    const { vesselId, path } = await boat('crew');
    const stew = await as(vesselId, 'chief_stew');
    const eto = await as(vesselId, 'eto');
    const change = await stew.post(`${path}/rotations/now`).expect(201);
    const sheet = await eto.post(`/vessels/${vesselId}/rotations/${change.body.id}/sheet`).expect(200);
    await eto.post(`/vessels/${vesselId}/rotations/${change.body.id}/give-up`).expect(200);
    const codes = await show(await as(vesselId, 'crew'), path);
    expect(codes.map(({ passphrase }) => passphrase)).toEqual([
      'what-is-in-force-now',
      sheet.body.passphrase,
    ]);
    expect(codes[0]?.words).toContain('being put back');
  });

  test('a network’s first: Quayword makes one, and it is in force once every access point has it', async () => {
    const { vesselId, points, path } = await boat('guest', null);
    const stew = await as(vesselId, 'chief_stew');
    const eto = await as(vesselId, 'eto');
    const change = await stew.post(`${path}/rotations/now`).expect(201);
    expect(roles(await show(stew, path))).toEqual(['staged']);
    const sheet = await eto.post(`/vessels/${vesselId}/rotations/${change.body.id}/sheet`).expect(200);
    expect(roles(await show(await as(vesselId, 'purser'), path))).toEqual(['new']);
    for (const point of points)
      await eto
        .post(`/vessels/${vesselId}/rotations/${change.body.id}/access-points/${point}/confirm`, {
          typed: sheet.body.passphrase,
        })
        .expect(200);
    const read = await eto.get(path).expect(200);
    expect(read.body.live).toMatchObject({ generation: 1, origin: 'generated', grade: 'strong' });
    expect(read.body.standing).toBe('in_order');
  });
});
