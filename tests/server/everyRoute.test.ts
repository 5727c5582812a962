import { randomUUID } from 'node:crypto';
import supertest from 'supertest';
import { beforeAll, describe, expect, test } from 'vitest';
import type { AnyContract } from '../../server/http/reply.ts';
import { endpoints } from '../../server/routes.ts';
import { dealerMay, may } from '../../shared/rules/permissions.ts';
import { useApp } from '../support/app.ts';
import { anonymousClient, Client } from '../support/client.ts';
import { factories } from '../support/factories.ts';

const app = useApp();
const make = factories(app);
const contracts: readonly AnyContract[] = endpoints.map(({ contract }) => contract);
const TEN_MINUTES = 600_000;

const world = { dealerId: '', vesselId: '', networkId: '', captain: '', dealer: '' };
beforeAll(async () => {
  world.dealerId = await make.dealer();
  world.vesselId = await make.vessel({ dealerId: world.dealerId });
  const live = 'what-is-in-force-on-every-route';
  world.networkId = (await make.network(world.vesselId, { live })).id;
  world.captain = (await make.member(world.vesselId, 'captain')).id;
  world.dealer = (await make.dealerMember(world.dealerId)).id;
});

const client = async (personId: string) => new Client(app, await make.session(personId));
const whoMay = ({ access }: AnyContract): string => (access.kind === 'dealer' ? world.dealer : world.captain);

const address = ({ path }: AnyContract): string =>
  path.replace(/:(\w+)/g, (_all: string, name: string) =>
    name === 'vesselId' ? world.vesselId : name === 'networkId' ? world.networkId : randomUUID(),
  );

function ask(asking: Client, contract: AnyContract) {
  const path = address(contract);
  if (contract.method === 'GET') return asking.get(path);
  if (contract.method === 'DELETE') return asking.delete(path);
  const verb = contract.method.toLowerCase() as 'post' | 'put' | 'patch';
  return asking[verb](path, {});
}

describe('R12: a role that needs a second factor, held by somebody without one', () => {
  const factorFor = (roles: string) =>
    app.services.db.transaction({ kind: 'system' }, async (tx) => {
      await app.services.db.run(tx, 'UPDATE vessels SET second_factor_roles = $roles', { roles });
      await app.services.db.run(tx, 'UPDATE dealers SET second_factor_roles = $roles', { roles });
    });

  test('meets 403 on every route of the vessel and of the fleet, and none about themselves', async () => {
    await factorFor('{captain,service_desk}');
    try {
      const met: Record<string, [number, string | undefined]> = {};
      const wanted: Record<string, [number, string | undefined]> = {};
      for (const contract of contracts) {
        const { access, name } = contract;
        const answer = await ask(await client(whoMay(contract)), contract);
        const code: string | undefined = answer.body?.code;
        if (access.kind === 'vessel' || access.kind === 'dealer') {
          const allowed =
            access.kind === 'dealer'
              ? dealerMay('service_desk', access.action)
              : access.actions.some((action) => may(['captain'], action));
          met[name] = [answer.status, code];
          wanted[name] = [403, allowed ? 'second_factor_needed' : 'forbidden'];
        } else if (code === 'second_factor_needed') {
          met[name] = [answer.status, code];
        }
      }
      expect(met).toEqual(wanted);
      // The way out stays open: the account page and setting a factor up.
      const captain = await client(world.captain);
      expect((await captain.get('/session').expect(200)).body.secondFactor).toEqual({
        enrolled: false,
        required: true,
      });
      await captain.post('/account/second-factor').expect(200);
    } finally {
      await factorFor('{}');
    }
  }, 60_000);
});

describe('R13: an identity proved eleven minutes ago', () => {
  // What asks for a fresh proof whatever the network; the owner's network asks on reveal, card and sheet besides.
  const FRESH = [
    'account.beginSecondFactor',
    'account.finishSecondFactor',
    'log.export',
    'members.invite',
    'members.setRoles',
    'networks.changePolicy',
    'networks.remove',
    'passphrases.typeIn',
    'vessels.add',
    'vessels.change',
  ];

  test('is asked again on these routes, before anything of the request is looked at, and on no other', async () => {
    const askedAgain: string[] = [];
    for (const contract of contracts) {
      const asking = await client(whoMay(contract));
      app.clock.advance(TEN_MINUTES + 1000);
      const answer = await ask(asking, contract);
      if (answer.body?.code === 'step_up') askedAgain.push(contract.name);
    }
    expect(askedAgain.sort()).toEqual(FRESH);
  }, 60_000);

  test('exactly ten minutes are fresh enough', async () => {
    const captain = await client(world.captain);
    app.clock.advance(TEN_MINUTES);
    await captain.post(`/vessels/${world.vesselId}/log/export`).expect(200);
    app.clock.advance(1);
    await captain.post(`/vessels/${world.vesselId}/log/export`).expect(403);
  });
});

describe('R29: nothing of an answer is kept by a browser or on the way (RFC 9111 section 5.2.2.5)', () => {
  const kept = (answer: { headers: Record<string, string> }, what: string): string[] =>
    answer.headers['cache-control'] === 'no-store' && answer.headers.etag === undefined ? [] : [what];

  test('of every route, to whoever may and to nobody, with its errors', async () => {
    const wrong: string[] = [];
    const statuses = new Set<number>();
    for (const contract of contracts) {
      for (const asking of [await client(whoMay(contract)), anonymousClient(app)]) {
        const answer = await ask(asking, contract);
        statuses.add(answer.status);
        wrong.push(...kept(answer, `${contract.name} ${answer.status}`));
      }
    }
    expect(wrong).toEqual([]);
    // Otherwise the walk met nothing but refusals.
    for (const status of [200, 204, 401, 404, 422]) expect([...statuses]).toContain(status);
  }, 60_000);

  test('of a shown passphrase, a printed card, an exported log, and requests that cannot be read', async () => {
    const captain = await client(world.captain);
    const base = `/vessels/${world.vesselId}`;
    const { id } = await make.network(world.vesselId, { ssid: 'Shown', live: 'what-is-shown-and-printed' });
    const network = `${base}/networks/${id}`;
    const wrong: string[] = [];
    const asks = {
      reveal: captain.post(`${network}/reveal`).expect(200),
      'card as PDF': captain.post(`${network}/cards/print`, { blanks: 1, format: 'wallet' }).expect(200),
      'log as CSV': captain.post(`${base}/log/export`).expect(200),
      'not JSON': captain.post(`${network}/reveal`).send('{"a":').expect(400),
      'too large': captain
        .post(`${network}/reveal`)
        .send(JSON.stringify({ a: 'x'.repeat(2 ** 20) }))
        .expect(413),
      'no such address': captain.get('/nothing/here').expect(404),
      'no such method': supertest(app.app).put('/api/session').expect(405),
    };
    for (const [what, asked] of Object.entries(asks)) wrong.push(...kept(await asked, what));
    expect(wrong).toEqual([]);
  });
});

test('R14: every known address refuses every other method and names those it has (RFC 9110 section 15.5.6)', async () => {
  const METHODS = ['GET', 'POST', 'PUT', 'PATCH', 'DELETE'] as const;
  const wrong: string[] = [];
  for (const path of new Set(contracts.map((contract) => contract.path))) {
    const here = contracts.filter((contract) => contract.path === path);
    const [first] = here;
    const at = first ? address(first) : path;
    // A more general address may match as well ("me" in an id's place); it answers for its own methods.
    const matching = contracts.filter((contract) =>
      new RegExp(`^${contract.path.replace(/:\w+/g, '[^/]+')}$`).test(at),
    );
    for (const method of METHODS) {
      if (matching.some((contract) => contract.method === method)) continue;
      const verb = method.toLowerCase() as 'get' | 'post' | 'put' | 'patch' | 'delete';
      const answer = await supertest(app.app)[verb](`/api${at}`);
      const allow = String(answer.headers.allow).split(', ').sort();
      const wanted = here.map((contract) => contract.method).sort();
      if (answer.status !== 405 || allow.join() !== wanted.join())
        wrong.push(`${method} ${path}: ${answer.status} ${answer.headers.allow}`);
    }
  }
  expect(wrong).toEqual([]);
}, 60_000);
