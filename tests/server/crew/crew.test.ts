import { describe, expect, test } from 'vitest';
import type { CrewView } from '../../../shared/api/crew.ts';
import { aboard } from '../../support/aboard.ts';
import { useApp, uuid } from '../../support/app.ts';
import { Client } from '../../support/client.ts';

const app = useApp();
const { make, as, person, look, logged, ago } = aboard(app);

const DECKHAND = {
  name: 'Tomasz Wieczorek',
  position: 'Deckhand',
  department: 'Deck',
  email: null,
  language: 'en',
  signedOnAt: '2026-05-01T08:00:00Z',
} as const;

async function boat() {
  const vesselId = await make.vessel({ zone: 'Europe/Zagreb' });
  await make.accessPoint(vesselId, 'Salon');
  const crewNet = await make.network(vesselId, {
    audience: 'crew',
    ssid: 'Tamarisk Crew',
    live: 'the-crew-networks-words',
    liveAt: ago(3),
  });
  const guestNet = await make.network(vesselId, { ssid: 'Tamarisk Guest', live: 'the-guest-networks-words' });
  return { vesselId, crewNet, guestNet, path: `/vessels/${vesselId}/crew` };
}

const list = async (client: Client, path: string) =>
  (await client.get(path).expect(200)).body as { aboard: CrewView[]; signedOff: CrewView[] };

describe('the crew list', () => {
  test('is kept by captain and chief stew, and read back by department', async () => {
    const { vesselId, path } = await boat();
    const stew = await as(vesselId, 'chief_stew');
    const added = await stew.post(path, DECKHAND).expect(201);
    expect(added.body).toEqual({
      ...DECKHAND,
      id: expect.any(String),
      signedOnAt: '2026-05-01T08:00:00.000Z',
      signedOffAt: null,
      account: false,
      holds: [],
    });
    await stew
      .post(path, { ...DECKHAND, name: 'Lucía Ferrer', position: 'Cook', department: '  ' })
      .expect(201);
    const { aboard: crew } = await list(stew, path);
    expect(crew.map(({ name, department }) => [name, department])).toEqual([
      ['Lucía Ferrer', ''],
      ['Tomasz Wieczorek', 'Deck'],
    ]);
    const corrected = await stew
      .patch(`${path}/${added.body.id}`, { ...DECKHAND, position: 'Bosun' })
      .expect(200);
    expect(corrected.body.position).toBe('Bosun');
    for (const role of ['purser', 'eto', 'crew'] as const) {
      const client = await as(vesselId, role);
      await client.get(path).expect(403);
      await client.post(path, DECKHAND).expect(403);
      await client.post(`${path}/${added.body.id}/sign-off`).expect(403);
    }
    expect(await logged(vesselId)).toEqual(['crew.signed_on', 'crew.signed_on', 'crew.changed']);
  });

  test('names every wrong field, and the same address only once', async () => {
    const { vesselId, path } = await boat();
    const stew = await as(vesselId, 'chief_stew');
    const wrong = await stew
      .post(path, {
        ...DECKHAND,
        name: '',
        email: 'not an address',
        signedOnAt: 'yesterday',
        personId: uuid(),
      })
      .expect(422);
    expect(Object.keys(wrong.body.errors).sort()).toEqual(['email', 'name', 'personId', 'signedOnAt']);
    await stew.post(path, { ...DECKHAND, email: 'tomasz@crew.example' }).expect(201);
    const twice = await stew.post(path, { ...DECKHAND, email: 'TOMASZ@crew.example' }).expect(422);
    expect(Object.keys(twice.body.errors)).toEqual(['email']);
  });

  test('R15: another vessel’s entry is not found, and stays as it is', async () => {
    const one = await boat();
    const two = await boat();
    const theirs = await (await as(two.vesselId, 'captain')).post(two.path, DECKHAND).expect(201);
    const captain = await as(one.vesselId, 'captain');
    for (const ask of [
      (id: string) => captain.patch(`${one.path}/${id}`, DECKHAND),
      (id: string) => captain.post(`${one.path}/${id}/sign-off`),
      (id: string) => captain.post(`${one.path}/${id}/back`),
    ]) {
      const foreign = await ask(theirs.body.id).expect(404);
      const random = await ask(uuid()).expect(404);
      expect({ ...foreign.body, requestId: '' }).toEqual({ ...random.body, requestId: '' });
    }
    await captain.get(two.path).expect(404);
    expect(
      await look('SELECT signed_off_at FROM crew_members WHERE id = $id', { id: theirs.body.id }),
    ).toEqual([{ signed_off_at: null }]);
  });
});

describe('one’s own page', () => {
  test('says when the crew network changed and changes next, and shows its code only when asked', async () => {
    const { vesselId, crewNet, path } = await boat();
    const hand = await person(vesselId, 'crew', 'Tomasz Wieczorek');
    const stew = await as(vesselId, 'chief_stew');
    const entry = await stew.post(path, { ...DECKHAND, email: hand.email }).expect(201);
    expect(entry.body.account).toBe(true);
    const before = await hand.client.get(`${path}/me`).expect(200);
    expect(before.body).toEqual({
      networks: [
        {
          networkId: crewNet.id,
          ssid: 'Tamarisk Crew',
          since: ago(3).toISOString(),
          nextChangeAt: null,
          readAt: null,
        },
      ],
    });
    const code = await hand.client.post(`/vessels/${vesselId}/networks/${crewNet.id}/own-code`).expect(200);
    expect(code.headers['cache-control']).toContain('no-store');
    expect(code.body.codes).toMatchObject([{ role: 'in_force', passphrase: 'the-crew-networks-words' }]);
    expect((await hand.client.get(`${path}/me`)).body.networks[0].readAt).toBe(app.clock.now().toISOString());
    expect(
      await look('SELECT holder_kind, holder_id, channel FROM handovers WHERE network_id = $id', {
        id: crewNet.id,
      }),
    ).toEqual([{ holder_kind: 'crew', holder_id: entry.body.id, channel: 'own_page' }]);
    expect((await list(stew, path)).aboard[0]?.holds).toEqual(['Tamarisk Crew']);
    expect((await logged(vesselId)).at(-1)).toBe('handover.own_page');
  });

  test('shows neither the guests’ nor the owner’s', async () => {
    const { vesselId, guestNet, path } = await boat();
    const owners = await make.network(vesselId, { audience: 'owner', live: 'the-owners-own-words' });
    const hand = await as(vesselId, 'crew');
    const page = await hand.get(`${path}/me`).expect(200);
    expect(page.text).not.toContain('Guest');
    for (const id of [guestNet.id, owners.id]) {
      await hand.post(`/vessels/${vesselId}/networks/${id}/own-code`).expect(403);
      await hand.post(`/vessels/${vesselId}/networks/${id}/reveal`).expect(403);
    }
    expect(await look('SELECT 1 FROM handovers WHERE vessel_id = $vessel', { vessel: vesselId })).toEqual([]);
  });
});

describe('signing off', () => {
  test('exposes what they know, moves its change up, and ends their roles with the next request', async () => {
    const { vesselId, crewNet, path } = await boat();
    const hand = await person(vesselId, 'crew', 'Tomasz Wieczorek');
    const mate = await as(vesselId, 'crew');
    const stew = await as(vesselId, 'chief_stew');
    const entry = await stew.post(path, { ...DECKHAND, email: hand.email }).expect(201);
    await hand.client.post(`/vessels/${vesselId}/networks/${crewNet.id}/own-code`).expect(200);

    const off = await stew.post(`${path}/${entry.body.id}/sign-off`).expect(200);
    expect(off.body.member).toMatchObject({
      signedOffAt: app.clock.now().toISOString(),
      holds: ['Tamarisk Crew'],
    });
    expect(off.body.exposed).toEqual([{ network: 'Tamarisk Crew', changeAt: expect.any(String) }]);
    const network = await stew.get(`/vessels/${vesselId}/networks/${crewNet.id}`).expect(200);
    expect(network.body).toMatchObject({ standing: 'exposed', holders: { current: 0, departed: 1 } });
    expect(network.body.change.reasons[0].code).toBe('sign_off');
    expect(network.body.change.dueAt).toBe(off.body.exposed[0].changeAt);

    await hand.client.get(`${path}/me`).expect(404);
    await hand.client.post(`/vessels/${vesselId}/networks/${crewNet.id}/own-code`).expect(404);
    await mate.get(`${path}/me`).expect(200);
    const kinds = await logged(vesselId);
    expect(kinds).toEqual(expect.arrayContaining(['crew.signed_off', 'role.ended', 'rotation.planned']));
    await stew.post(`${path}/${entry.body.id}/sign-off`).expect(409);
    const { aboard: crew, signedOff } = await list(stew, path);
    expect(crew).toEqual([]);
    expect(signedOff.map(({ name, holds }) => [name, holds])).toEqual([
      ['Tomasz Wieczorek', ['Tamarisk Crew']],
    ]);
  });

  test('back aboard: no longer departed, but roles are given anew', async () => {
    const { vesselId, crewNet, path } = await boat();
    const hand = await person(vesselId, 'crew');
    const stew = await as(vesselId, 'chief_stew');
    const entry = await stew.post(path, { ...DECKHAND, email: hand.email }).expect(201);
    await hand.client.post(`/vessels/${vesselId}/networks/${crewNet.id}/own-code`).expect(200);
    await stew.post(`${path}/${entry.body.id}/sign-off`).expect(200);
    const back = await stew.post(`${path}/${entry.body.id}/back`).expect(200);
    expect(back.body.signedOffAt).toBeNull();
    await stew.post(`${path}/${entry.body.id}/back`).expect(409);
    const network = await stew.get(`/vessels/${vesselId}/networks/${crewNet.id}`).expect(200);
    expect(network.body).toMatchObject({ standing: 'in_order', holders: { current: 1, departed: 0 } });
    await hand.client.get(`${path}/me`).expect(404);
  });

  test('an account that came after the entry, and what it was shown before it was known as theirs, count too', async () => {
    const { vesselId, crewNet, path } = await boat();
    const stew = await as(vesselId, 'chief_stew');
    const entry = await stew.post(path, { ...DECKHAND, email: 'tomasz@crew.example' }).expect(201);
    expect(entry.body.account).toBe(false);
    const later = await make.person({ email: 'Tomasz@crew.example' });
    await make.member(vesselId, 'crew', { personId: later.id });
    const hand = new Client(app, await make.session(later.id));
    await hand.post(`/vessels/${vesselId}/networks/${crewNet.id}/reveal`).expect(200);
    const off = await stew.post(`${path}/${entry.body.id}/sign-off`).expect(200);
    expect(off.body.member).toMatchObject({ account: true, holds: ['Tamarisk Crew'] });
    expect(off.body.exposed).toHaveLength(1);
    await hand.get(`${path}/me`).expect(404);
  });

  test('somebody who knows nothing exposes nothing, and leaves the list of those to think of', async () => {
    const { vesselId, path } = await boat();
    const stew = await as(vesselId, 'chief_stew');
    const entry = await stew.post(path, DECKHAND).expect(201);
    const off = await stew.post(`${path}/${entry.body.id}/sign-off`).expect(200);
    expect(off.body.exposed).toEqual([]);
    expect((await list(stew, path)).signedOff.map(({ holds }) => holds)).toEqual([[]]);
    app.clock.advance(200 * 86_400_000);
    const later = await as(vesselId, 'chief_stew');
    expect((await list(later, path)).signedOff).toEqual([]);
  });

  test('a captain is signed off by a captain, and the last one stays', async () => {
    const { vesselId, path } = await boat();
    const captain = await person(vesselId, 'captain', 'Idris Calloway');
    const second = await person(vesselId, 'captain', 'Maren Aasgaard');
    const stew = await as(vesselId, 'chief_stew');
    const entry = await stew
      .post(path, { ...DECKHAND, position: 'Captain', email: captain.email })
      .expect(201);
    await stew.post(`${path}/${entry.body.id}/sign-off`).expect(403);
    await captain.client.get(`/vessels/${vesselId}`).expect(200);
    await second.client.post(`${path}/${entry.body.id}/sign-off`).expect(200);
    await captain.client.get(`/vessels/${vesselId}`).expect(404);
    const last = await second.client
      .post(path, { ...DECKHAND, position: 'Captain', email: second.email })
      .expect(201);
    const stays = await second.client.post(`${path}/${last.body.id}/sign-off`).expect(409);
    expect(stays.body.detail).toContain('at least one captain');
    expect((await list(second.client, path)).aboard).toHaveLength(1);
  });
});
