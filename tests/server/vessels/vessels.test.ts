import { describe, expect, test } from 'vitest';
import { aboard } from '../../support/aboard.ts';
import { useApp, uuid } from '../../support/app.ts';

const app = useApp();
const { make, as, look, write, logged } = aboard(app);

const settingsOf = async (vesselId: string) => {
  const captain = await as(vesselId, 'captain');
  const read = await captain.get(`/vessels/${vesselId}/settings`).expect(200);
  const { id: _id, zones, cabins, accessPoints, driver, dealer, ...body } = read.body;
  return { captain, body, zones, cabins, accessPoints, driver, dealer };
};

describe('the head of every page', () => {
  test('crew see the name, berth and ship’s time, and no planned change', async () => {
    const vesselId = await make.vessel({ name: 'Tamarisk', zone: 'Europe/Zagreb' });
    const network = await make.network(vesselId, { live: 'a-passphrase-in-force' });
    await write(
      `INSERT INTO rotations(id, vessel_id, network_id, state, driver, epoch, planned_by, due_at, created_at, updated_at)
       VALUES ($id, $vessel, $network, 'planned', 'by_hand', 1, 'plan', $due, $due, $due)`,
      { id: uuid(), vessel: vesselId, network: network.id, due: new Date('2026-06-14T21:30:00Z') },
    );
    const crew = await (await as(vesselId, 'crew')).get(`/vessels/${vesselId}`).expect(200);
    expect(crew.body).toEqual({
      id: vesselId,
      name: 'Tamarisk',
      lying: 'Split, berth C14',
      source: 'dock',
      zone: 'Europe/Zagreb',
      changesToday: [],
    });
    const eto = await (await as(vesselId, 'eto')).get(`/vessels/${vesselId}`).expect(200);
    expect(eto.body.changesToday).toEqual([
      { at: '2026-06-14T21:30:00.000Z', network: 'Tamarisk guest', audience: 'guest', done: false },
    ]);
  });

  test('“today” is the ship’s day: half past midnight tomorrow in Split is still today in UTC', async () => {
    const vesselId = await make.vessel({ zone: 'Europe/Zagreb' });
    const network = await make.network(vesselId);
    await write(
      `INSERT INTO rotations(id, vessel_id, network_id, state, driver, epoch, planned_by, due_at, created_at, updated_at)
       VALUES ($id, $vessel, $network, 'planned', 'by_hand', 1, 'plan', $due, $due, $due)`,
      { id: uuid(), vessel: vesselId, network: network.id, due: new Date('2026-06-14T22:30:00Z') },
    );
    const eto = await (await as(vesselId, 'eto')).get(`/vessels/${vesselId}`).expect(200);
    expect(eto.body.changesToday).toEqual([]);
  });
});

describe('settings', () => {
  test('the captain changes them and reads them back; an officer may only read, crew may not', async () => {
    const vesselId = await make.vessel();
    const { captain, body, driver } = await settingsOf(vesselId);
    expect(driver).toBe('by_hand');
    const wanted = { ...body, name: 'Tamarisk II', lengthM: 42.5, ownerName: '', retentionDays: 30 };
    const changed = await captain.patch(`/vessels/${vesselId}`, wanted).expect(200);
    expect(changed.body).toMatchObject({
      name: 'Tamarisk II',
      lengthM: 42.5,
      ownerName: null,
      retentionDays: 30,
    });
    const purser = await as(vesselId, 'purser');
    const read = await purser.get(`/vessels/${vesselId}/settings`).expect(200);
    expect(read.body).toEqual(changed.body);
    await purser.patch(`/vessels/${vesselId}`, { ...wanted, updatedAt: changed.body.updatedAt }).expect(403);
    await (await as(vesselId, 'crew')).get(`/vessels/${vesselId}/settings`).expect(403);
    expect(await logged(vesselId)).toEqual(['vessel.changed']);
  });

  test('two people editing at once: the second is told, and nothing of the first is lost', async () => {
    const vesselId = await make.vessel();
    const { captain, body } = await settingsOf(vesselId);
    app.clock.advance(1000);
    await captain.patch(`/vessels/${vesselId}`, { ...body, lying: 'Hvar' }).expect(200);
    const second = await captain.patch(`/vessels/${vesselId}`, { ...body, lying: 'Vis' }).expect(409);
    expect(second.body).toMatchObject({ code: 'conflict', detail: expect.stringContaining('Reload') });
    expect(await look('SELECT lying FROM vessels WHERE id = $id', { id: vesselId })).toEqual([
      { lying: 'Hvar' },
    ]);
  });

  test('R13: asks for a fresh proof of identity; R17: a column that is nobody’s to set is 422 and stays', async () => {
    const vesselId = await make.vessel();
    const { captain, body } = await settingsOf(vesselId);
    for (const extra of ['dealerId', 'epoch', 'driver', 'demo', 'lastSerial', 'vesselId', '__proto__x']) {
      const answer = await captain.patch(`/vessels/${vesselId}`, { ...body, [extra]: uuid() }).expect(422);
      expect(answer.body.errors).toEqual({ [extra]: ['This field is not known here; leave it out'] });
    }
    app.clock.advance(11 * 60_000);
    const stale = await captain.patch(`/vessels/${vesselId}`, body).expect(403);
    expect(stale.body.code).toBe('step_up');
    expect(await logged(vesselId)).toEqual([]);
  });

  test('every invalid field is named with what would be right', async () => {
    const vesselId = await make.vessel();
    const { captain, body } = await settingsOf(vesselId);
    const wrong = {
      ...body,
      name: ' ',
      lengthM: 0.04,
      retentionDays: 0,
      serialPrefix: 'tam',
      source: 'balloon',
    };
    const answer = await captain.patch(`/vessels/${vesselId}`, wrong).expect(422);
    expect(Object.keys(answer.body.errors).sort()).toEqual([
      'lengthM',
      'name',
      'retentionDays',
      'serialPrefix',
      'source',
    ]);
    expect(answer.body.errors.serialPrefix).toEqual(['One to three capital letters']);
  });

  test('any officer says what feeds the boat; the arrivals’ caution follows', async () => {
    const vesselId = await make.vessel();
    const eto = await as(vesselId, 'eto');
    await eto.put(`/vessels/${vesselId}/source`, { source: 'satellite' }).expect(204);
    const head = await eto.get(`/vessels/${vesselId}`).expect(200);
    expect(head.body).toMatchObject({ source: 'satellite', lying: 'Split, berth C14' });
    await eto.put(`/vessels/${vesselId}/source`, { source: 'cellular', lying: '' }).expect(204);
    expect((await eto.get(`/vessels/${vesselId}`)).body).toMatchObject({ source: 'cellular', lying: null });
    await (await as(vesselId, 'crew')).put(`/vessels/${vesselId}/source`, { source: 'dock' }).expect(403);
  });
});

describe('cabins and access points', () => {
  test('cabins keep their ids through a new order and swapped names, and their guests', async () => {
    const vesselId = await make.vessel();
    const captain = await as(vesselId, 'captain');
    const path = `/vessels/${vesselId}/cabins`;
    const first = await captain
      .put(path, {
        cabins: [
          { deck: 'Main', name: 'Master' },
          { deck: 'Lower', name: 'Twin' },
        ],
      })
      .expect(200);
    const [master, twin] = first.body.cabins;
    const guest = uuid();
    await write(
      `INSERT INTO guests(id, vessel_id, cabin_id, label, from_at, until_at, created_at, updated_at)
       VALUES ($id, $vessel, $cabin, 'Guest 1', $now, $until, $now, $now)`,
      { id: guest, vessel: vesselId, cabin: twin.id, now: app.clock.now(), until: new Date('2027-06-20') },
    );
    const swapped = await captain
      .put(path, {
        cabins: [
          { id: twin.id, deck: 'Lower', name: 'Master' },
          { id: master.id, deck: 'Main', name: 'Twin' },
          { deck: 'Lower', name: 'VIP' },
        ],
      })
      .expect(200);
    expect(swapped.body.cabins.map(({ id, name }: { id: string; name: string }) => [id, name])).toEqual([
      [twin.id, 'Master'],
      [master.id, 'Twin'],
      [expect.any(String), 'VIP'],
    ]);
    expect(await look('SELECT cabin_id FROM guests WHERE id = $id', { id: guest })).toEqual([
      { cabin_id: twin.id },
    ]);
    await captain.put(path, { cabins: [{ id: master.id, deck: 'Main', name: 'Twin' }] }).expect(200);
    expect(await look('SELECT label, cabin_id FROM guests WHERE id = $id', { id: guest })).toEqual([
      { label: 'Guest 1', cabin_id: null },
    ]);
    const twice = await captain
      .put(path, {
        cabins: [
          { deck: 'Main', name: 'Twin' },
          { deck: 'Main', name: 'TWIN' },
        ],
      })
      .expect(422);
    expect(Object.keys(twice.body.errors)).toEqual(['cabins.1.name']);
    await (await as(vesselId, 'purser')).put(path, { cabins: [] }).expect(403);
  });

  test('an access point that a change counts on cannot be taken away; once it is cancelled it can', async () => {
    const vesselId = await make.vessel();
    await make.network(vesselId, { audience: 'crew', live: 'a-passphrase-in-force' });
    const eto = await as(vesselId, 'eto');
    const path = `/vessels/${vesselId}/access-points`;
    const listed = await eto
      .put(path, {
        accessPoints: [
          { name: 'Salon', deck: 'Main' },
          { name: 'Sundeck', deck: '' },
        ],
      })
      .expect(200);
    const [salon] = listed.body.accessPoints;
    expect(listed.body.accessPoints[1].deck).toBeNull();
    const stew = await as(vesselId, 'chief_stew');
    const networks = await stew.get(`/vessels/${vesselId}/networks`).expect(200);
    const started = await stew
      .post(`/vessels/${vesselId}/networks/${networks.body.networks[0].id}/rotations/now`)
      .expect(201);
    const only = { accessPoints: [{ id: salon.id, name: 'Salon', deck: 'Main' }] };
    const refused = await eto.put(path, only).expect(409);
    expect(refused.body.detail).toContain('“Sundeck”');
    await eto
      .put(path, { accessPoints: [...listed.body.accessPoints, { name: 'Bow', deck: null }] })
      .expect(200);
    await stew.post(`/vessels/${vesselId}/rotations/${started.body.id}/cancel`).expect(200);
    const left = await eto.put(path, only).expect(200);
    expect(left.body.accessPoints.map(({ name }: { name: string }) => name)).toEqual(['Salon']);
  });

  test('boundaries: 60 characters of a name are taken, 61 are not', async () => {
    const vesselId = await make.vessel();
    const eto = await as(vesselId, 'eto');
    const path = `/vessels/${vesselId}/access-points`;
    await eto.put(path, { accessPoints: [{ name: 'x'.repeat(60), deck: null }] }).expect(200);
    const long = await eto.put(path, { accessPoints: [{ name: 'x'.repeat(61), deck: null }] }).expect(422);
    expect(long.body.errors).toEqual({ 'accessPoints.0.name': ['Keep it to 60 characters'] });
  });

  test('R15: another vessel’s cabin, access point or zone is not found, to the octet as if there were none', async () => {
    const own = await make.vessel();
    const other = await make.vessel({ name: 'Corvina' });
    const captain = await as(own, 'captain');
    const theirs = await as(other, 'captain');
    const cabin = (
      await theirs.put(`/vessels/${other}/cabins`, { cabins: [{ deck: 'Main', name: 'Master' }] })
    ).body.cabins[0].id;
    const point = await make.accessPoint(other, 'Salon');
    const zone = (await theirs.get(`/vessels/${other}/settings`)).body.zones[0].id;
    const before = await look('SELECT * FROM cabins, access_points, ship_zones');
    const ask = [
      (id: string) => captain.put(`/vessels/${own}/cabins`, { cabins: [{ id, deck: 'Main', name: 'Mine' }] }),
      (id: string) =>
        captain.put(`/vessels/${own}/access-points`, { accessPoints: [{ id, name: 'Mine', deck: null }] }),
      (id: string) => captain.delete(`/vessels/${own}/zones/${id}`),
    ];
    for (const [index, one] of ask.entries()) {
      const foreign = await one([cabin, point, zone][index] as string).expect(404);
      const random = await one(uuid()).expect(404);
      expect({ ...foreign.body, requestId: '' }).toEqual({ ...random.body, requestId: '' });
    }
    for (const path of ['', '/settings']) await captain.get(`/vessels/${other}${path}`).expect(404);
    await captain.put(`/vessels/${other}/cabins`, { cabins: [] }).expect(404);
    expect(await look('SELECT * FROM cabins, access_points, ship_zones')).toEqual(before);
  });
});
