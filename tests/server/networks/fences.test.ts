import { describe, expect, test } from 'vitest';
import type { Scope } from '../../../server/db/connection.ts';
import { openPassphrase } from '../../../server/passphrases/sealPassphrase.ts';
import { aboard } from '../../support/aboard.ts';
import { useApp, uuid } from '../../support/app.ts';
import type { Client } from '../../support/client.ts';

const app = useApp();
const { make, as, look, write } = aboard(app);

const inScope = <T extends object>(scope: Scope, sql: string) =>
  app.services.db.transaction(scope, (tx) => app.services.db.rows<T>(tx, sql));

async function two() {
  const dealerId = await make.dealer();
  const own = await make.vessel({ dealerId, name: 'Tamarisk' });
  const other = await make.vessel({ dealerId, name: 'Corvina' });
  const mine = await make.network(own, {
    audience: 'crew',
    ssid: 'Mine',
    live: `mine-canary-${own.slice(0, 8)}`,
  });
  const theirs = await make.network(other, {
    audience: 'crew',
    ssid: 'Theirs',
    live: `theirs-canary-${other.slice(0, 8)}`,
  });
  return { dealerId, own, other, mine, theirs };
}

const BODY = {
  ssid: 'Renamed',
  audience: 'crew',
  security: 'wpa2',
  hidden: false,
  carriesEquipment: false,
  note: null,
};
const RULES = {
  ageLimitDays: 30,
  leastBits: 64,
  words: 5,
  quietHours: [],
  onPartyDeparture: false,
  onSignOff: true,
  onLostCard: true,
  onLeak: true,
};

describe('R15: another vessel’s network', () => {
  test('answers each verb and sibling as if there were none, to the octet, and nothing of it changes', async () => {
    const { own, other, theirs } = await two();
    const captain = await as(own, 'captain');
    const leak = uuid();
    await write(
      `INSERT INTO leaks(id, vessel_id, network_id, passphrase_id, kind, at) VALUES ($id, $vessel, $network, $passphrase, 'reported', $now)`,
      { id: leak, vessel: other, network: theirs.id, passphrase: theirs.passphraseId, now: app.clock.now() },
    );
    const stored = () =>
      look(
        'SELECT n.*, p.*, x.*, l.withdrawn_at FROM networks n JOIN policies p ON p.network_id = n.id JOIN passphrases x ON x.network_id = n.id JOIN leaks l ON l.network_id = n.id WHERE n.vessel_id = $other',
        { other },
      );
    const before = await stored();
    const asks: ((vessel: string, network: string, leak: string) => ReturnType<Client['get']>)[] = [
      (v, n) => captain.get(`/vessels/${v}/networks/${n}`),
      (v, n) => captain.patch(`/vessels/${v}/networks/${n}`, BODY),
      (v, n) => captain.delete(`/vessels/${v}/networks/${n}`),
      (v, n) => captain.put(`/vessels/${v}/networks/${n}/policy`, RULES),
      (v, n) => captain.post(`/vessels/${v}/networks/${n}/leaks`, {}),
      (v, n, l) => captain.delete(`/vessels/${v}/networks/${n}/leaks/${l}`),
      (v, n) => captain.post(`/vessels/${v}/networks/${n}/passphrase/check`, { passphrase: 'eight-or-more' }),
      (v, n) => captain.post(`/vessels/${v}/networks/${n}/passphrase`, { passphrase: 'eight-or-more' }),
      (v, n) => captain.post(`/vessels/${v}/networks/${n}/reveal`),
      (v, n) => captain.post(`/vessels/${v}/networks/${n}/own-code`),
    ];
    for (const ask of asks) {
      const random = await ask(own, uuid(), uuid()).expect(404);
      for (const foreign of [await ask(own, theirs.id, leak), await ask(other, theirs.id, leak)]) {
        expect(foreign.status).toBe(404);
        expect({ ...foreign.body, requestId: '' }).toEqual({ ...random.body, requestId: '' });
      }
    }
    expect(await stored()).toEqual(before);
  });

  test('a leak of the neighbour network is not found under this one', async () => {
    const vesselId = await make.vessel();
    const one = await make.network(vesselId, { ssid: 'One', live: 'a-passphrase-in-force' });
    const two = await make.network(vesselId, { ssid: 'Two', live: 'another-one-in-force' });
    const purser = await as(vesselId, 'purser');
    const reported = await purser.post(`/vessels/${vesselId}/networks/${one.id}/leaks`).expect(201);
    const leak = reported.body.leaks[0].id;
    await purser.delete(`/vessels/${vesselId}/networks/${two.id}/leaks/${leak}`).expect(404);
    await purser.delete(`/vessels/${vesselId}/networks/${one.id}/leaks/${leak}`).expect(200);
  });
});

describe('R17: fields nobody sets', () => {
  test('are named and refused on each route, and nothing is written', async () => {
    const { own, mine } = await two();
    const captain = await as(own, 'captain');
    const path = `/vessels/${own}/networks`;
    const before = await look('SELECT * FROM networks WHERE vessel_id = $own', { own });
    for (const extra of ['id', 'vesselId', 'lastTicket', 'lastGeneration', 'removedAt', 'livePassphrase']) {
      for (const answer of [
        await captain.post(path, { ...BODY, [extra]: 1 }),
        await captain.patch(`${path}/${mine.id}`, { ...BODY, [extra]: 1 }),
        await captain.put(`${path}/${mine.id}/policy`, { ...RULES, [extra]: 1 }),
        await captain.post(`${path}/${mine.id}/leaks`, { [extra]: 1 }),
        await captain.post(`${path}/${mine.id}/passphrase`, { passphrase: 'eight-or-more', [extra]: 1 }),
      ]) {
        expect(answer.status).toBe(422);
        expect(Object.keys(answer.body.errors)).toEqual([extra]);
      }
    }
    expect(await look('SELECT * FROM networks WHERE vessel_id = $own', { own })).toEqual(before);
  });
});

describe('R18: behind the code’s own filters', () => {
  const TABLES = [
    'networks',
    'policies',
    'passphrases',
    'passphrase_secrets',
    'ship_zones',
    'holders',
    'leaks',
  ];

  test('a query in one vessel’s scope that forgets its filter sees nothing of another, and cannot write there', async () => {
    const { own, other, theirs } = await two();
    for (const table of TABLES) {
      const seen = await inScope<{ vessel_id: string }>(
        { kind: 'vessel', vesselId: own },
        `SELECT vessel_id FROM ${table}`,
      );
      expect(seen.filter((row) => row.vessel_id !== own)).toEqual([]);
    }
    expect(
      await inScope({ kind: 'vessel', vesselId: own }, `SELECT id FROM vessels WHERE id <> '${own}'`),
    ).toEqual([]);
    await app.services.db.transaction({ kind: 'vessel', vesselId: own }, async (tx) => {
      await app.services.db.run(tx, "UPDATE networks SET ssid = 'Taken over'");
      await app.services.db.run(tx, 'UPDATE passphrase_secrets SET sealed = NULL');
    });
    expect(await look('SELECT ssid FROM networks WHERE id = $id', { id: theirs.id })).toEqual([
      { ssid: 'Theirs' },
    ]);
    await expect(
      app.services.db.transaction({ kind: 'vessel', vesselId: own }, (tx) =>
        app.services.db.run(tx, 'UPDATE networks SET vessel_id = $other', { other }),
      ),
    ).rejects.toThrow(/row-level security/);
  });

  test('without a scope there is nothing at all', async () => {
    await two();
    for (const table of TABLES) expect(await inScope({ kind: 'none' }, `SELECT 1 FROM ${table}`)).toEqual([]);
  });

  test('R16: a dealer’s scope reads ages and no secret, and writes nothing', async () => {
    const { dealerId, own } = await two();
    const fleet = { kind: 'fleet', dealerId } as const;
    expect(await inScope(fleet, `SELECT bits FROM passphrases WHERE vessel_id = '${own}'`)).toHaveLength(1);
    expect(await inScope(fleet, 'SELECT 1 FROM passphrase_secrets')).toEqual([]);
    await app.services.db.transaction(fleet, async (tx) => {
      expect(await app.services.db.run(tx, "UPDATE networks SET ssid = 'Taken over' RETURNING 1")).toEqual(
        [],
      );
    });
  });
});

describe('R21: a sealed passphrase', () => {
  test('opens only in its own row: another network’s, another vessel’s or a flipped bit is refused', async () => {
    const { own, other, mine, theirs } = await two();
    const neighbour = await make.network(own, {
      audience: 'crew',
      ssid: 'Next',
      live: 'the-neighbours-own-words',
    });
    const captain = await as(own, 'captain');
    const show = () => captain.post(`/vessels/${own}/networks/${mine.id}/reveal`);
    expect((await show().expect(200)).body.codes[0].passphrase).toBe(`mine-canary-${own.slice(0, 8)}`);
    const [kept] = await look<{ sealed: Buffer }>(
      'SELECT sealed FROM passphrase_secrets WHERE passphrase_id = $id',
      { id: mine.passphraseId },
    );
    for (const from of [theirs.passphraseId, neighbour.passphraseId]) {
      await write(
        'UPDATE passphrase_secrets SET sealed = (SELECT sealed FROM passphrase_secrets WHERE passphrase_id = $from) WHERE passphrase_id = $id',
        { from, id: mine.passphraseId },
      );
      const moved = await show();
      expect(moved.status).toBeGreaterThanOrEqual(500);
      expect(moved.text).not.toContain('canary');
      expect(moved.text).not.toContain('neighbours');
    }
    const flipped = Buffer.from(kept?.sealed ?? []);
    flipped[20] = (flipped[20] ?? 0) ^ 1;
    const put = (sealed: Buffer | undefined) =>
      write('UPDATE passphrase_secrets SET sealed = $sealed WHERE passphrase_id = $id', {
        sealed,
        id: mine.passphraseId,
      });
    await put(flipped);
    expect((await show()).status).toBeGreaterThanOrEqual(500);
    await put(kept?.sealed);
    await show().expect(200);
    // What could not be opened was not written down as shown.
    const shown = await look<{ count: number }>(
      "SELECT count(*)::int AS count FROM log_entries WHERE vessel_id = $own AND kind = 'passphrase.revealed'",
      { own },
    );
    expect(shown).toEqual([{ count: 2 }]);
    const opened = await app.services.db.transaction({ kind: 'vessel', vesselId: other }, (tx) =>
      openPassphrase(app.services, tx, theirs.passphraseId ?? ''),
    );
    expect(opened).toContain('theirs-canary');
    await expect(
      app.services.db.transaction({ kind: 'vessel', vesselId: own }, (tx) =>
        openPassphrase(app.services, tx, theirs.passphraseId ?? ''),
      ),
    ).rejects.toMatchObject({ code: 'not_found' });
  });
});
