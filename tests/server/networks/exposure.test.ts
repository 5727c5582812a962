import { describe, expect, test } from 'vitest';
import { aboard } from '../../support/aboard.ts';
import { useApp, uuid } from '../../support/app.ts';

const app = useApp();
const { make, as, person, write, logged, ago } = aboard(app);

describe('a leak', () => {
  test('exposes the network and moves its change up; withdrawn, the network stands in order again', async () => {
    const vesselId = await make.vessel();
    await make.accessPoint(vesselId, 'Salon');
    const { id } = await make.network(vesselId, {
      audience: 'crew',
      live: 'a-passphrase-in-force',
      liveAt: ago(2),
    });
    const neighbour = await make.network(vesselId, { audience: 'guest', live: 'the-neighbours-words' });
    const path = `/vessels/${vesselId}/networks/${id}`;
    const captain = await as(vesselId, 'captain');
    const before = await captain
      .put(`${path}/policy`, { ...(await captain.get(path)).body.policy, ageLimitDays: 40 })
      .expect(200);
    const purser = await as(vesselId, 'purser');
    const reported = await purser.post(`${path}/leaks`, { note: 'On the mess notice board' }).expect(201);
    expect(reported.body).toMatchObject({
      standing: 'exposed',
      leaks: [{ kind: 'reported', note: 'On the mess notice board', serial: null }],
    });
    expect(reported.body.change.dueAt < before.body.change.dueAt).toBe(true);
    expect(reported.body.change.reasons[0].code).toBe('leak');
    expect((await purser.get(`/vessels/${vesselId}/networks/${neighbour.id}`)).body.standing).toBe(
      'in_order',
    );

    const leakId = reported.body.leaks[0].id;
    const back = await purser.delete(`${path}/leaks/${leakId}`).expect(200);
    expect(back.body).toMatchObject({ standing: 'in_order', leaks: [] });
    await purser.delete(`${path}/leaks/${leakId}`).expect(404);
    await (await as(vesselId, 'crew')).post(`${path}/leaks`).expect(403);
    const kinds = await logged(vesselId);
    expect(kinds.filter((kind) => kind.startsWith('leak'))).toEqual(['leak.reported', 'leak.withdrawn']);
  });

  test('cannot be reported where nothing is in force, and a lost card is taken back with its card', async () => {
    const vesselId = await make.vessel();
    const empty = await make.network(vesselId);
    const eto = await as(vesselId, 'eto');
    await eto.post(`/vessels/${vesselId}/networks/${empty.id}/leaks`).expect(409);
    const { id, passphraseId } = await make.network(vesselId, {
      ssid: 'Other',
      live: 'a-passphrase-in-force',
    });
    const leak = uuid();
    await write(
      `INSERT INTO leaks(id, vessel_id, network_id, passphrase_id, kind, at) VALUES ($id, $vessel, $network, $passphrase, 'lost_card', $now)`,
      { id: leak, vessel: vesselId, network: id, passphrase: passphraseId, now: app.clock.now() },
    );
    await eto.delete(`/vessels/${vesselId}/networks/${id}/leaks/${leak}`).expect(404);
  });

  test('its note is for those who may see guests and for whoever wrote it', async () => {
    const vesselId = await make.vessel();
    const { id } = await make.network(vesselId, { live: 'a-passphrase-in-force' });
    const path = `/vessels/${vesselId}/networks/${id}`;
    await (await as(vesselId, 'purser'))
      .post(`${path}/leaks`, { note: 'Mrs Okonkwo’s nephew posted it' })
      .expect(201);
    const eto = await as(vesselId, 'eto');
    await eto.post(`${path}/leaks`, { note: 'Seen on the rack' }).expect(201);
    const seen = await eto.get(path).expect(200);
    expect(seen.text).not.toContain('Okonkwo');
    expect(seen.body.leaks.map(({ note }: { note: string | null }) => note).sort()).toEqual(
      ['Seen on the rack', null].sort(),
    );
    const stew = await (await as(vesselId, 'chief_stew')).get(path).expect(200);
    expect(stew.text).toContain('Okonkwo');
  });
});

describe('who holds it', () => {
  test('guests are named to those who may see guests, crew to those who see the crew list, the rest are counted', async () => {
    const vesselId = await make.vessel();
    const network = await make.network(vesselId, { live: 'a-passphrase-in-force' });
    const stewardess = await person(vesselId, 'chief_stew', 'Ilse Vandersteen');
    await stewardess.client.post(`/vessels/${vesselId}/networks/${network.id}/reveal`).expect(200);
    const guest = uuid();
    await write(
      `INSERT INTO guests(id, vessel_id, name, label, from_at, until_at, created_at, updated_at)
       VALUES ($id, $vessel, 'Ama Boateng-Lindqvist', 'Guest 1', $from, $until, $from, $from)`,
      { id: guest, vessel: vesselId, from: ago(1), until: new Date('2027-01-01') },
    );
    await write(
      `INSERT INTO holders(passphrase_id, holder_kind, holder_id, vessel_id, network_id, since, through)
       VALUES ($passphrase, 'guest', $guest, $vessel, $network, $at, 'card')`,
      { passphrase: network.passphraseId, guest, vessel: vesselId, network: network.id, at: ago(1) },
    );
    const path = `/vessels/${vesselId}/networks/${network.id}`;
    const names = async (role: 'captain' | 'purser' | 'eto') =>
      (await (await as(vesselId, role)).get(path).expect(200)).body.holderList.map(
        ({ name }: { name: string | null }) => name,
      );
    expect(await names('captain')).toEqual(['Ama Boateng-Lindqvist', 'Ilse Vandersteen']);
    expect(await names('purser')).toEqual(['Ama Boateng-Lindqvist', null]);
    expect(await names('eto')).toEqual([null, null]);
  });

  test('its history is ages and grades, newest first, without a passphrase', async () => {
    const vesselId = await make.vessel();
    const { id } = await make.network(vesselId, { live: 'the-first-one-of-all', liveAt: ago(20) });
    const eto = await as(vesselId, 'eto');
    const path = `/vessels/${vesselId}/networks/${id}`;
    await eto.post(`${path}/passphrase`, { passphrase: 'captain-typed-this-1' }).expect(201);
    const read = await eto.get(path).expect(200);
    expect(read.body.history).toMatchObject([
      { generation: 2, origin: 'typed', retiredAt: null },
      { generation: 1, origin: 'generated', retiredAt: app.clock.now().toISOString() },
    ]);
    expect(read.text).not.toContain('captain-typed');
    expect(read.text).not.toContain('the-first-one');
  });
});
