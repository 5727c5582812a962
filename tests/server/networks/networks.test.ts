import { describe, expect, test } from 'vitest';
import { sealPassphrase } from '../../../server/passphrases/sealPassphrase.ts';
import type { NetworkView } from '../../../shared/api/networks.ts';
import { aboard } from '../../support/aboard.ts';
import { useApp, uuid } from '../../support/app.ts';

const app = useApp();
const { make, as, look, write, logged, ago } = aboard(app);

const GUEST = {
  ssid: 'Tamarisk Guest',
  audience: 'guest',
  security: 'wpa2',
  hidden: false,
  carriesEquipment: false,
  note: null,
} as const;

const holder = (
  vesselId: string,
  network: { id: string; passphraseId: string | null },
  departedAt: Date | null,
) =>
  write(
    `INSERT INTO holders(passphrase_id, holder_kind, holder_id, vessel_id, network_id, since, through, departed_at)
     VALUES ($passphrase, 'guest', $holder, $vessel, $network, $at, 'card', $departed)`,
    {
      passphrase: network.passphraseId,
      holder: uuid(),
      vessel: vesselId,
      network: network.id,
      at: ago(1),
      departed: departedAt,
    },
  );

describe('a network', () => {
  test('is added by the captain or the ETO with rules that suit its audience, and read back by every officer', async () => {
    const vesselId = await make.vessel();
    const eto = await as(vesselId, 'eto');
    const added = await eto.post(`/vessels/${vesselId}/networks`, GUEST).expect(201);
    expect(added.body).toMatchObject({
      ...GUEST,
      live: null,
      standing: 'due',
      change: null,
      drift: null,
      leaks: [],
      holders: { current: 0, departed: 0 },
      policy: { ageLimitDays: 14, onPartyDeparture: true, onLeak: true },
      may: { plan: false, reveal: false, edit: true, policy: false, typeIn: true },
    });
    const stew = await as(vesselId, 'chief_stew');
    const list = await stew.get(`/vessels/${vesselId}/networks`).expect(200);
    expect(list.body.networks[0].may).toEqual({
      plan: true,
      reveal: true,
      edit: false,
      policy: false,
      typeIn: false,
    });
    await stew.post(`/vessels/${vesselId}/networks`, { ...GUEST, ssid: 'Other' }).expect(403);
    await (await as(vesselId, 'crew')).get(`/vessels/${vesselId}/networks`).expect(403);
    expect(await logged(vesselId)).toEqual(['network.added']);
  });

  test('SSIDs: 32 octets are taken, 33 are not, whatever the characters (IEEE 802.11, SSID element)', async () => {
    const vesselId = await make.vessel();
    const eto = await as(vesselId, 'eto');
    const add = (ssid: string) => eto.post(`/vessels/${vesselId}/networks`, { ...GUEST, ssid });
    await add('å'.repeat(16)).expect(201);
    await add('x'.repeat(32)).expect(201);
    for (const ssid of ['', `${'å'.repeat(16)}x`, 'x'.repeat(33), 'a\tb', '\ud800']) {
      const answer = await add(ssid).expect(422);
      expect(Object.keys(answer.body.errors)).toEqual(['ssid']);
    }
    const twice = await add('x'.repeat(32)).expect(422);
    expect(twice.body.errors.ssid[0]).toContain('Another network of this vessel');
    // Names that some phones read wrongly are taken and said so.
    const hex = await add('C0FFEE').expect(201);
    expect(hex.body.cautions).toEqual([expect.stringContaining('digits 0–9 and A–F')]);
  });

  test('another vessel may have the same SSID', async () => {
    for (const name of ['Tamarisk', 'Corvina']) {
      const vesselId = await make.vessel({ name });
      await (await as(vesselId, 'eto')).post(`/vessels/${vesselId}/networks`, GUEST).expect(201);
    }
  });

  test('stands in order, due, overdue or exposed, by age against its limit and by who left with it', async () => {
    const vesselId = await make.vessel();
    const make1 = (ssid: string, age: number) =>
      make.network(vesselId, { ssid, live: `in-force-on-${ssid}`, liveAt: ago(age), ageLimitDays: 100 });
    await make1('fresh', 89.9);
    await make1('nearly', 90);
    await make1('on the day', 100);
    await make1('past', 100.1);
    const left = await make1('left', 1);
    await holder(vesselId, left, ago(0.5));
    await holder(vesselId, left, null);
    const eto = await as(vesselId, 'eto');
    const { networks } = (await eto.get(`/vessels/${vesselId}/networks`).expect(200)).body as {
      networks: NetworkView[];
    };
    expect(Object.fromEntries(networks.map(({ ssid, standing }) => [ssid, standing]))).toEqual({
      fresh: 'in_order',
      nearly: 'due',
      'on the day': 'due',
      past: 'overdue',
      left: 'exposed',
    });
    expect(networks.find(({ ssid }) => ssid === 'left')?.holders).toEqual({ current: 1, departed: 1 });
  });

  test('says its strength in words that follow how it is attacked, and never bits or length', async () => {
    const vesselId = await make.vessel();
    await make.network(vesselId, { ssid: 'wpa2', security: 'wpa2', live: 'seventeen-letters', bits: 40 });
    await make.network(vesselId, { ssid: 'wpa3', security: 'wpa3', live: 'eighteen-letters-x', bits: 40 });
    const answer = await (await as(vesselId, 'eto')).get(`/vessels/${vesselId}/networks`).expect(200);
    const [wpa2, wpa3] = answer.body.networks;
    // 2^39 / 2,539,800 per second: about 2.5 days (hashcat's published rate for one graphics card).
    expect(wpa2.live).toMatchObject({
      grade: 'weak',
      strength: 'about 3 days for someone who recorded one phone joining',
    });
    expect(wpa3.live.strength).toContain('within reach of the boat');
    expect(Object.keys(wpa2.live).sort()).toEqual(
      ['ageDays', 'generation', 'grade', 'liveAt', 'origin', 'passphraseId', 'strength'].sort(),
    );
  });

  test('a new name voids its cards, says that everybody joins again, and waits for a change under way', async () => {
    const vesselId = await make.vessel();
    await make.accessPoint(vesselId, 'Salon');
    const { id, passphraseId } = await make.network(vesselId, {
      ssid: 'Tamarisk',
      audience: 'guest',
      live: 'a-passphrase-in-force',
    });
    await write(
      `INSERT INTO cards(id, vessel_id, network_id, passphrase_id, serial, format, language, state, printed_at)
       VALUES ($id, $vessel, $network, $passphrase, 'T-1001', 'wallet', 'en', 'handed_over', $now)`,
      { id: uuid(), vessel: vesselId, network: id, passphrase: passphraseId, now: app.clock.now() },
    );
    const eto = await as(vesselId, 'eto');
    const path = `/vessels/${vesselId}/networks/${id}`;
    const noted = await eto.patch(path, { ...GUEST, ssid: 'Tamarisk', note: 'For guests' }).expect(200);
    expect(noted.body).toMatchObject({ note: 'For guests', notice: null });
    const renamed = await eto.patch(path, GUEST).expect(200);
    expect(renamed.body.notice).toContain('Every device has to join again');
    expect(renamed.body.notice).toContain('One card is void');
    expect(await look('SELECT state FROM cards WHERE network_id = $id', { id })).toEqual([{ state: 'void' }]);

    const stew = await as(vesselId, 'chief_stew');
    const change = await stew.post(`${path}/rotations/now`).expect(201);
    await eto.post(`/vessels/${vesselId}/rotations/${change.body.id}/sheet`).expect(200);
    const busy = await eto.patch(path, { ...GUEST, ssid: 'Third' }).expect(409);
    expect(busy.body.detail).toContain('under way');
    await eto.patch(path, { ...GUEST, note: 'Still writable' }).expect(200);
  });

  test('never changes sides: the ETO cannot make the owner’s network a crew one and read it', async () => {
    const vesselId = await make.vessel();
    await make.accessPoint(vesselId, 'Salon');
    const { id } = await make.network(vesselId, { audience: 'owner', live: 'the-owners-own-words' });
    const eto = await as(vesselId, 'eto');
    const crewOne = { ...GUEST, ssid: 'Tamarisk owner', audience: 'crew' };
    const answer = await eto.patch(`/vessels/${vesselId}/networks/${id}`, crewOne).expect(422);
    expect(Object.keys(answer.body.errors)).toEqual(['audience']);
    await eto.post(`/vessels/${vesselId}/networks/${id}/reveal`).expect(403);

    // A staged first passphrase counts too; before there is any, a slip can be put right.
    const empty = await make.network(vesselId, { audience: 'owner', ssid: 'Second' });
    await eto.patch(`/vessels/${vesselId}/networks/${empty.id}`, { ...crewOne, ssid: 'Second' }).expect(200);
    await app.services.db.transaction({ kind: 'system' }, (tx) =>
      sealPassphrase(app.services, tx, {
        vesselId,
        networkId: empty.id,
        passphrase: 'staged-and-not-in-force',
        origin: 'generated',
        bits: 65,
        now: app.clock.now(),
      }),
    );
    await eto.patch(`/vessels/${vesselId}/networks/${empty.id}`, { ...GUEST, ssid: 'Second' }).expect(422);
  });

  test('is removed with its plan, its passphrase retired and its cards void; not while a change is under way', async () => {
    const vesselId = await make.vessel();
    await make.accessPoint(vesselId, 'Salon');
    const { id } = await make.network(vesselId, { audience: 'crew', live: 'a-passphrase-in-force' });
    const path = `/vessels/${vesselId}/networks/${id}`;
    const stew = await as(vesselId, 'chief_stew');
    const eto = await as(vesselId, 'eto');
    const change = await stew.post(`${path}/rotations/now`).expect(201);
    await eto.post(`/vessels/${vesselId}/rotations/${change.body.id}/sheet`).expect(200);
    await eto.delete(path).expect(409);
    await eto.get(path).expect(200);
    await eto.post(`/vessels/${vesselId}/rotations/${change.body.id}/give-up`).expect(200);
    // Going back is under way too: the access points may run either.
    await eto.delete(path).expect(409);

    const other = await make.network(vesselId, { audience: 'guest', live: 'another-one-in-force' });
    const own = `/vessels/${vesselId}/networks/${other.id}`;
    await stew.post(`${own}/rotations/now`).expect(201);
    await stew.delete(own).expect(403);
    app.clock.advance(11 * 60_000);
    expect((await eto.delete(own).expect(403)).body.code).toBe('step_up');
    const fresh = await as(vesselId, 'eto');
    await fresh.delete(own).expect(204);
    await fresh.get(own).expect(404);
    await fresh.delete(own).expect(404);
    expect(await look('SELECT state FROM rotations WHERE network_id = $id', { id: other.id })).toEqual([
      { state: 'cancelled' },
    ]);
    expect(
      await look(
        'SELECT count(*)::int AS kept FROM passphrases WHERE network_id = $id AND retired_at IS NULL',
        {
          id: other.id,
        },
      ),
    ).toEqual([{ kept: 0 }]);
    expect(
      (
        await look<{ kind: string }>('SELECT kind FROM log_entries WHERE network_id = $id ORDER BY seq', {
          id: other.id,
        })
      ).map(({ kind }) => kind),
    ).toEqual([
      'rotation.planned',
      'rotation.staged',
      'rotation.cancelled',
      'passphrase.retired',
      'passphrase.retired',
      'network.removed',
    ]);
  });
});
