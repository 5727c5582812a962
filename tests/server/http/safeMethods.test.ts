import { beforeAll, describe, expect, test } from 'vitest';
import { endpoints } from '../../../server/routes.ts';
import { useApp } from '../../support/app.ts';
import { type Boat, boats } from '../../support/boat.ts';
import { factories } from '../../support/factories.ts';
import { contents } from './contents.ts';
import { address, ownPage, sessionCookie, wire } from './wire.ts';

const app = useApp();
const make = factories(app);
const net = wire(app);
const all = contents(app);
const world: { boat?: Boat; captain: string; dealer: string } = { captain: '', dealer: '' };

beforeAll(async () => {
  const dealerId = await make.dealer();
  world.boat = await boats(app).boat();
  world.captain = await make.session((await make.member(world.boat.vesselId, 'captain')).id);
  world.dealer = await make.session((await make.dealerMember(dealerId)).id);
});

const reads = endpoints.filter(({ contract }) => contract.method === 'GET');

function pathOf(contract: (typeof reads)[number]['contract']): string {
  const { boat } = world;
  if (!boat) throw new Error('The boat is made before the tests');
  return address(contract, { vesselId: boat.vesselId, networkId: boat.networks.guest.id });
}
const sessionFor = (contract: (typeof reads)[number]['contract']) =>
  contract.access.kind === 'dealer' ? world.dealer : world.captain;

describe('R31: safe methods never write (RFC 9110 section 9.2.1)', () => {
  test.each(reads.map(({ contract }) => [contract.name, contract] as const))(
    '%s',
    async (_name, contract) => {
      const before = await all.now();
      const headers = { Cookie: sessionCookie(app, sessionFor(contract)) };
      for (const method of ['GET', 'HEAD', 'OPTIONS']) {
        const answer = await net.ask(method, pathOf(contract), { headers, sessionId: sessionFor(contract) });
        expect(answer.status, method).toBeLessThan(500);
      }
      expect(await all.now()).toEqual(before);
    },
  );

  test('a session’s last use is all that is noted, and only once a minute', async () => {
    const headers = { Cookie: sessionCookie(app, world.captain) };
    app.clock.advance(5 * 60_000);
    const before = await all.now();
    await net.ask('GET', '/api/session', { headers });
    const once = await all.now();
    await net.ask('GET', '/api/session', { headers });
    const twice = await all.now();
    const changed = Object.keys(once).filter((table) => once[table] !== before[table]);
    expect(changed).toEqual(['public.sessions']);
    expect(twice).toEqual(once);
  });

  test('the database itself refuses a write inside one', async () => {
    const { db } = app.services;
    const writing = db.transaction(
      { kind: 'system' },
      (tx) => db.run(tx, "UPDATE vessels SET name = 'Somebody'"),
      { readOnly: true },
    );
    await expect(writing).rejects.toMatchObject({ original: { code: '25006' } });
  });
});

describe('R27: nothing secret in an address', () => {
  test('no answer’s headers carry a token, a name or a passphrase, and there is no Location to follow', async () => {
    const { boat } = world;
    const secrets = [
      ...Object.values(boat?.networks ?? {}).map(({ passphrase }) => passphrase),
      'Sigrun Brandvold',
      'Ottoline Brandt',
      world.captain,
    ];
    for (const { contract } of endpoints) {
      const sessionId = sessionFor(contract);
      const answer = await net.ask(contract.method, pathOf(contract), {
        headers:
          contract.method === 'GET' ? { Cookie: sessionCookie(app, sessionId) } : ownPage(app, sessionId),
        sessionId,
        ...(contract.method === 'GET' ? {} : { body: '{}' }),
      });
      const headers = JSON.stringify({ ...answer.headers, 'set-cookie': undefined });
      for (const secret of secrets) expect(headers, contract.name).not.toContain(secret);
      expect(answer.headers.location, contract.name).toBeUndefined();
      expect(answer.headers['referrer-policy']).toBe('no-referrer');
      // The session ended with this route; the next ones need another.
      if (answer.headers['clear-site-data']) world.captain = await renewed();
    }
  });

  test('no route takes a token, a password, a code or a name in its path, and only a search has a person in its query', () => {
    const WORDS = /token|password|code|passphrase|secret|email|name|person/i;
    const inPath = endpoints.flatMap(({ contract }) =>
      contract.path.split('/').filter((part: string) => part.startsWith(':') && WORDS.test(part)),
    );
    expect(inPath).toEqual([':personId']);
    const inQuery = endpoints.flatMap(({ contract }) => {
      const shape = (contract.query as { shape?: Record<string, unknown> } | undefined)?.shape ?? {};
      return Object.keys(shape)
        .filter((name) => WORDS.test(name))
        .map((name) => `${contract.name} ${name}`);
    });
    expect(inQuery).toEqual(['log.read person']);
  });
});

async function renewed(): Promise<string> {
  const { boat } = world;
  return make.session((await make.member(boat?.vesselId ?? '', 'captain')).id);
}
