import { describe, expect, test } from 'vitest';
import { aboard } from '../../support/aboard.ts';
import { useApp, uuid } from '../../support/app.ts';

const app = useApp();
const { make, as, person, look, write, logged, ago } = aboard(app);

async function boat(given: Parameters<typeof make.network>[1] = {}) {
  const vesselId = await make.vessel({ name: 'Tamarisk' });
  await make.accessPoint(vesselId, 'Salon');
  const network = await make.network(vesselId, { ssid: 'Tamarisk Guest', ...given });
  return { vesselId, network, path: `/vessels/${vesselId}/networks/${network.id}` };
}

describe('typing in the passphrase in force', () => {
  test('the ETO’s goes on record sealed, with a verdict, in the log, and the ETO holds it', async () => {
    const { vesselId, network, path } = await boat();
    const eto = await person(vesselId, 'eto');
    const typed = await eto.client.post(`${path}/passphrase`, { passphrase: 'Zb7#kQw0-vR2tYp9' }).expect(201);
    expect(typed.body.verdict).toMatchObject({ grade: 'fair', cautions: [] });
    expect(typed.body.network).toMatchObject({
      live: { generation: 1, origin: 'typed', liveAt: app.clock.now().toISOString() },
      holders: { current: 1, departed: 0 },
      change: { state: 'planned' },
    });
    expect(typed.text).not.toContain('Zb7#kQw0');
    const [stored] = await look<{ sealed: Buffer; fingerprint: Buffer }>(
      'SELECT s.sealed, s.fingerprint FROM passphrase_secrets s JOIN passphrases x ON x.id = s.passphrase_id WHERE x.network_id = $id',
      { id: network.id },
    );
    expect(stored?.sealed.toString('latin1')).not.toContain('Zb7#');
    expect(
      await look('SELECT holder_kind, holder_id, through FROM holders WHERE network_id = $id', {
        id: network.id,
      }),
    ).toEqual([{ holder_kind: 'person', holder_id: eto.id, through: 'typed' }]);
    expect(await logged(vesselId)).toEqual(['passphrase.typed', 'rotation.planned']);
    const captain = await as(vesselId, 'captain');
    const shown = await captain.post(`${path}/reveal`).expect(200);
    expect(shown.body.codes[0].passphrase).toBe('Zb7#kQw0-vR2tYp9');
  });

  test('its age counts from the day it is known to be in force, never from one to come', async () => {
    const { vesselId, path } = await boat({ ageLimitDays: 14 });
    const eto = await as(vesselId, 'eto');
    const passphrase = 'Zb7#kQw0-vR2tYp9';
    const ahead = { passphrase, since: ago(-1).toISOString() };
    expect((await eto.post(`${path}/passphrase`, ahead).expect(422)).body.errors).toHaveProperty('since');
    const typed = await eto
      .post(`${path}/passphrase`, { passphrase, since: ago(40).toISOString() })
      .expect(201);
    expect(typed.body.network).toMatchObject({ standing: 'overdue', live: { ageDays: 40 } });
  });

  test('a note that holds a passphrase is refused, however it is spaced, and kept nowhere', async () => {
    const { vesselId, path } = await boat({ live: 'maple-sextant-orbit-velvet-drum' });
    const captain = await as(vesselId, 'captain');
    for (const note of [
      'It is maple-sextant-orbit-velvet-drum',
      'somebody read MAPLE SEXTANT ORBIT VELVET DRUM aloud',
    ])
      expect((await captain.post(`${path}/leaks`, { note }).expect(422)).body.errors).toHaveProperty('note');
    await captain.post(`${path}/leaks`, { note: 'Read out on deck' }).expect(201);
  });

  test('a weak one is taken, because it is the truth, and flagged in words', async () => {
    const { vesselId, path } = await boat();
    const eto = await as(vesselId, 'eto');
    const typed = await eto.post(`${path}/passphrase`, { passphrase: 'Tamarisk2026' }).expect(201);
    expect(typed.body.verdict.grade).toBe('weak');
    expect(typed.body.verdict.words).toMatch(/for someone who recorded one phone joining$/);
    expect(typed.body.network.live).toMatchObject({ grade: 'weak', strength: typed.body.verdict.words });
  });

  test('the vessel’s own words make a passphrase weaker; on another vessel the same one is not', async () => {
    const { vesselId, path } = await boat();
    const eto = await as(vesselId, 'eto');
    await write(
      `INSERT INTO crew_members(id, vessel_id, name, position, signed_on_at, created_at, updated_at)
       VALUES ($id, $vessel, 'Xzqvwkj Bfhrtpl', 'Bosun', $now, $now, $now)`,
      { id: uuid(), vessel: vesselId, now: app.clock.now() },
    );
    const own = await eto.post(`${path}/passphrase/check`, { passphrase: 'xzqvwkj-bfhrtpl' }).expect(200);
    const other = await boat();
    const stranger = await as(other.vesselId, 'eto');
    const foreign = await stranger
      .post(`${other.path}/passphrase/check`, { passphrase: 'xzqvwkj-bfhrtpl' })
      .expect(200);
    expect(own.body.grade).toBe('weak');
    expect(own.body.words).not.toBe(foreign.body.words);
    expect(foreign.body.grade).toBe('fair');
  });

  test('how it is attacked decides: the same one is weak on WPA2 and not on WPA3 alone', async () => {
    const { vesselId, path } = await boat();
    const wpa3 = await make.network(vesselId, { ssid: 'Third', security: 'wpa3' });
    const eto = await as(vesselId, 'eto');
    const passphrase = 'kQw0vR2tYp';
    const weak = await eto.post(`${path}/passphrase/check`, { passphrase }).expect(200);
    const fair = await eto
      .post(`/vessels/${vesselId}/networks/${wpa3.id}/passphrase/check`, { passphrase })
      .expect(200);
    expect([weak.body.grade, fair.body.grade]).toEqual(['weak', 'fair']);
    expect(fair.body.why).toContain('at an access point');
  });

  test('judging keeps nothing', async () => {
    const { vesselId, network, path } = await boat();
    const eto = await as(vesselId, 'eto');
    const judged = await eto
      .post(`${path}/passphrase/check`, { passphrase: 'some; thing "quoted"' })
      .expect(200);
    expect(Object.keys(judged.body).sort()).toEqual(['cautions', 'grade', 'why', 'words']);
    expect(judged.body.cautions[0]).toContain('semicolon');
    expect(await look('SELECT 1 FROM passphrases WHERE network_id = $id', { id: network.id })).toEqual([]);
    expect(await logged(vesselId)).toEqual([]);
  });

  test('7, 8, 63 and 64 characters, and what no phone types (IEEE 802.11-2012 M.4.1)', async () => {
    const { vesselId, path } = await boat();
    const eto = await as(vesselId, 'eto');
    const check = (passphrase: string) => eto.post(`${path}/passphrase/check`, { passphrase });
    await check('kQw0vR2t').expect(200);
    await check(`${'kQ w0'.repeat(12)}xyz`).expect(200);
    for (const passphrase of [
      'kQw0vR2',
      'x'.repeat(64),
      `${'a'.repeat(63)}é`,
      'kQw0vR2té',
      'kQw0v\u0000R2t',
      ' kQw0vR2t',
      '0123456789abcdef'.repeat(4),
      'x'.repeat(5000),
    ]) {
      const refused = await check(passphrase).expect(422);
      expect(Object.keys(refused.body.errors)).toEqual(['passphrase']);
      // Twelve characters and more of it would be a leak; the oracles search the answers too.
      expect(refused.text).not.toContain(passphrase);
    }
  });

  test('takes the place of the one on record: that one is retired, its cards are void, its exposure ends', async () => {
    const { vesselId, network, path } = await boat({ live: 'what-was-in-force-once', liveAt: ago(3) });
    await write(
      `INSERT INTO cards(id, vessel_id, network_id, passphrase_id, serial, format, language, state, printed_at)
       VALUES ($id, $vessel, $network, $passphrase, 'T-1001', 'wallet', 'en', 'handed_over', $now)`,
      {
        id: uuid(),
        vessel: vesselId,
        network: network.id,
        passphrase: network.passphraseId,
        now: app.clock.now(),
      },
    );
    const eto = await as(vesselId, 'eto');
    expect((await eto.post(`${path}/leaks`).expect(201)).body.standing).toBe('exposed');
    const typed = await eto.post(`${path}/passphrase`, { passphrase: 'changed-by-hand-7Q' }).expect(201);
    expect(typed.body.network).toMatchObject({ standing: 'in_order', leaks: [], live: { generation: 2 } });
    expect(await look('SELECT state FROM cards WHERE network_id = $id', { id: network.id })).toEqual([
      { state: 'void' },
    ]);
    expect((await logged(vesselId)).slice(-4)).toEqual(
      expect.arrayContaining(['passphrase.typed', 'passphrase.retired', 'card.void']),
    );
  });

  test('what is on record already is told apart from what the vessel had before', async () => {
    const { vesselId, path } = await boat({ live: 'what-was-in-force-once' });
    const eto = await as(vesselId, 'eto');
    const same = await eto.post(`${path}/passphrase`, { passphrase: 'what-was-in-force-once' }).expect(422);
    expect(same.body).toMatchObject({ code: 'invalid' });
    await eto.post(`${path}/passphrase`, { passphrase: 'changed-by-hand-7Q' }).expect(201);
    const back = await eto.post(`${path}/passphrase`, { passphrase: 'what-was-in-force-once' }).expect(422);
    expect(back.body.code).toBe('reused');
    const elsewhere = await boat();
    await (await as(elsewhere.vesselId, 'eto'))
      .post(`${elsewhere.path}/passphrase`, { passphrase: 'what-was-in-force-once' })
      .expect(201);
  });

  test('waits for a change that is staged or under way, and goes through once it is cancelled', async () => {
    const { vesselId, path } = await boat({ audience: 'crew', live: 'what-was-in-force-once' });
    const stew = await as(vesselId, 'chief_stew');
    const eto = await as(vesselId, 'eto');
    const change = await stew.post(`${path}/rotations/now`).expect(201);
    const body = { passphrase: 'changed-by-hand-7Q' };
    expect((await eto.post(`${path}/passphrase`, body).expect(409)).body.detail).toContain('staged');
    await stew.post(`/vessels/${vesselId}/rotations/${change.body.id}/cancel`).expect(200);
    await eto.post(`${path}/passphrase`, body).expect(201);
    const second = await stew.post(`${path}/rotations/now`).expect(201);
    await eto.post(`/vessels/${vesselId}/rotations/${second.body.id}/sheet`).expect(200);
    const busy = await eto.post(`${path}/passphrase`, { passphrase: 'changed-again-8R' }).expect(409);
    expect(busy.body.detail).toContain('under way');
  });

  test('R13, R14: asks for a fresh proof; interior and crew may neither type in nor judge', async () => {
    const { vesselId, path } = await boat();
    const body = { passphrase: 'changed-by-hand-7Q' };
    for (const role of ['chief_stew', 'purser', 'crew'] as const) {
      const client = await as(vesselId, role);
      await client.post(`${path}/passphrase`, body).expect(403);
      await client.post(`${path}/passphrase/check`, body).expect(403);
    }
    const eto = await as(vesselId, 'eto');
    app.clock.advance(11 * 60_000);
    expect((await eto.post(`${path}/passphrase`, body).expect(403)).body.code).toBe('step_up');
  });

  test('two at once: each is written down once, and one of them is in force', async () => {
    const { vesselId, network, path } = await boat();
    const [one, two] = [await as(vesselId, 'eto'), await as(vesselId, 'captain')];
    const put = (client: typeof one, passphrase: string) => client.post(`${path}/passphrase`, { passphrase });
    const same = await Promise.all([put(one, 'changed-by-hand-7Q'), put(two, 'changed-by-hand-7Q')]);
    expect(same.map(({ status }) => status).sort()).toEqual([201, 422]);
    const different = await Promise.all([put(one, 'changed-by-hand-8R'), put(two, 'changed-by-hand-9S')]);
    expect(different.map(({ status }) => status)).toEqual([201, 201]);
    const live = await look(
      'SELECT generation FROM passphrases WHERE network_id = $id AND live_at IS NOT NULL AND retired_at IS NULL',
      { id: network.id },
    );
    expect(live).toEqual([{ generation: 3 }]);
  });
});
