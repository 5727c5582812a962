import { randomUUID } from 'node:crypto';
import { describe, expect, test } from 'vitest';
import type { Scope } from '../../../server/db/connection.ts';
import { secretPlace } from '../../../server/passphrases/sealPassphrase.ts';
import type { FleetView } from '../../../shared/api/fleet.ts';
import { useApp, uuid } from '../../support/app.ts';
import { anonymousClient, Client } from '../../support/client.ts';
import { factories } from '../../support/factories.ts';
import { type Aboard, filled, holder, rotation } from './rows.ts';

const app = useApp();
const make = factories(app);
const DAY = 86_400_000;
const ago = (days: number) => new Date(app.clock.now().getTime() - days * DAY);

async function serviceDesk(name?: string) {
  const dealerId = await make.dealer(name);
  const person = await make.dealerMember(dealerId);
  return { dealerId, client: new Client(app, await make.session(person.id)) };
}

const secret = () => `canary-${randomUUID()}`;

/** A vessel with its three networks, of the ages given in days. */
async function vessel(
  dealerId: string,
  name: string,
  ages: { owner?: number; guest?: number; crew?: number },
  zone?: string,
): Promise<Aboard> {
  const id = await make.vessel({ dealerId, name, zone });
  const networks: Aboard['networks'] = {};
  for (const audience of ['owner', 'guest', 'crew'] as const) {
    const age = ages[audience];
    if (age === undefined) continue;
    networks[audience] = await make.network(id, {
      ssid: `${name} ${audience}`,
      audience,
      live: secret(),
      liveAt: ago(age),
    });
  }
  return { id, networks };
}

const read = async (client: Client, query = ''): Promise<FleetView> => {
  const answer = await client.get(`/fleet${query}`);
  expect(answer.status, answer.text).toBe(200);
  return answer.body as FleetView;
};

describe('who sees a fleet', () => {
  test('R15: a dealer sees no vessel of another dealer, and a foreign id is not found like any', async () => {
    const own = await serviceDesk();
    const other = await serviceDesk();
    const mine = await vessel(own.dealerId, 'Mine', { crew: 5 });
    const theirs = await vessel(other.dealerId, 'Theirs', { crew: 500 });
    expect((await read(own.client)).vessels.map((row) => row.vesselId)).toEqual([mine.id]);
    expect((await own.client.get(`/fleet/vessels/${mine.id}`)).status).toBe(200);
    const foreign = await own.client.get(`/fleet/vessels/${theirs.id}`);
    const nowhere = await own.client.get(`/fleet/vessels/${uuid()}`);
    const malformed = await own.client.get('/fleet/vessels/x');
    expect(foreign.status).toBe(404);
    for (const answer of [foreign, nowhere, malformed]) {
      expect({ ...answer.body, requestId: '' }).toEqual({ ...foreign.body, requestId: '' });
    }
    const csv = await own.client.post('/fleet/export');
    expect(csv.text).toContain('Mine');
    expect(csv.text).not.toContain('Theirs');
  });

  test('nobody without a dealer, and nobody signed out', async () => {
    const { dealerId } = await serviceDesk();
    const boat = await vessel(dealerId, 'Any', { crew: 5 });
    const captain = new Client(app, await make.session((await make.member(boat.id, 'captain')).id));
    for (const [client, status] of [
      [captain, 404],
      [anonymousClient(app), 401],
    ] as const) {
      expect((await client.get('/fleet')).status).toBe(status);
      expect((await client.get(`/fleet/vessels/${boat.id}`)).status).toBe(status);
      expect((await client.post('/fleet/export')).status).toBe(status);
    }
  });

  test('R18: within the scope of a fleet the database gives no secret, guest, crew, log or voyage', async () => {
    const { dealerId } = await serviceDesk();
    const boat = await vessel(dealerId, 'Any', { crew: 5 });
    const tables = await filled(app, boat);
    expect(tables.length).toBeGreaterThan(6);
    const { db } = app.services;
    for (const table of tables) {
      const count = (scope: Scope) =>
        db.transaction(scope, (tx) => db.row<{ n: number }>(tx, `SELECT count(*)::int AS n FROM ${table}`));
      expect((await count({ kind: 'system' }))?.n, table).toBeGreaterThan(0);
      expect(await count({ kind: 'fleet', dealerId }), table).toEqual({ n: 0 });
    }
    const networks = await db.transaction({ kind: 'fleet', dealerId }, (tx) =>
      db.rows(tx, 'SELECT id FROM networks'),
    );
    expect(networks).toHaveLength(1);
  });
});

describe('R16: what a dealer is answered does not depend on a passphrase', () => {
  test('another passphrase of another length changes no octet of any answer', async () => {
    const { dealerId, client } = await serviceDesk();
    const boat = await vessel(dealerId, 'Oracle', { owner: 5, guest: 5, crew: 50 });
    await holder(app, boat, 'crew', { departed: ago(1) });
    await rotation(app, boat, 'guest', {
      state: 'planned',
      reasons: [{ code: 'party_departure', title: 'Brandvold charter', party: 'Brandvold' }],
    });
    const ask = async () => {
      const answers = [
        await client.get('/fleet'),
        ...(await Promise.all(
          ['worst', 'weakest', 'departed', 'heard'].map((sort) =>
            client.get(`/fleet?sort=${sort}&standing=exposed`),
          ),
        )),
        await client.get('/fleet?sort=bits'),
        await client.get(`/fleet/vessels/${boat.id}`).set('Range', 'bytes=0-20'),
        await client.get(`/fleet/vessels/${boat.id}`),
        await client.post('/fleet/export'),
      ];
      return answers.map(({ status, headers, text }) => {
        const { date: _date, 'x-request-id': _id, ...rest } = headers as Record<string, string>;
        return { status, headers: rest, text: text.replace(/"requestId":"[^"]*"/, '') };
      });
    };
    await reseal(boat, 'short-canary-8');
    const short = await ask();
    await reseal(boat, 'a-much-longer-canary-of-sixty-three-characters-to-see-the-length');
    expect(await ask()).toEqual(short);
    const all = JSON.stringify(short);
    expect(all).not.toContain('canary');
    expect(all).not.toContain('Brandvold');
    expect(all).not.toMatch(/"(bits|score|length|hash|fingerprint|guesses|origin)"/);
  });

  test('bits within the same rough words give the same answer', async () => {
    const { dealerId, client } = await serviceDesk();
    const boat = await vessel(dealerId, 'Rough', { owner: 5, crew: 5 });
    const other = await vessel(dealerId, 'Tough', { owner: 5, crew: 5 });
    const ask = async () => [await read(client, '?sort=weakest'), (await client.post('/fleet/export')).text];
    const set = (vesselId: string, bits: number) =>
      app.services.db.transaction({ kind: 'system' }, (tx) =>
        app.services.db.run(tx, 'UPDATE passphrases SET bits = $bits WHERE vessel_id = $vesselId', {
          bits,
          vesselId,
        }),
      );
    await set(boat.id, 80);
    await set(other.id, 90);
    const before = await ask();
    await set(boat.id, 90);
    await set(other.id, 80);
    expect(await ask()).toEqual(before);
  });

  async function reseal(boat: Aboard, passphrase: string): Promise<void> {
    const { db, vault } = app.services;
    await db.transaction({ kind: 'system' }, async (tx) => {
      for (const [audience, network] of Object.entries(boat.networks)) {
        const id = network.passphraseId;
        if (id === null) throw new Error('A live passphrase is needed');
        const text = passphrase.slice(0, 60) + audience.slice(0, 3);
        const { keyId, sealed } = vault.seal(
          secretPlace({ id, vesselId: boat.id, networkId: network.id, generation: 1 }),
          text,
        );
        await db.run(
          tx,
          'UPDATE passphrase_secrets SET sealed = $sealed, key_id = $keyId, fingerprint = $print WHERE passphrase_id = $id',
          { id, sealed, keyId, print: vault.fingerprint(boat.id, text) },
        );
      }
    });
  }
});
