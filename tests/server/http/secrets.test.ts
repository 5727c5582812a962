import { randomBytes } from 'node:crypto';
import { beforeAll, beforeEach, describe, expect, test } from 'vitest';
import type { AnyContract } from '../../../server/http/reply.ts';
import { SESSION_COOKIE } from '../../../server/http/session.ts';
import { endpoints } from '../../../server/routes.ts';
import { useApp } from '../../support/app.ts';
import { at, type Boat, boats } from '../../support/boat.ts';
import { factories } from '../../support/factories.ts';
import { contents } from './contents.ts';
import { address, ownPage, wire } from './wire.ts';

const app = useApp();
const make = factories(app);
const net = wire(app);
const all = contents(app);
const world: { boat?: Boat; person: string; captain: string } = { person: '', captain: '' };
const boat = (): Boat => {
  if (!world.boat) throw new Error('The boat is made before the tests');
  return world.boat;
};

beforeAll(async () => {
  world.boat = await boats(app).boat();
  world.person = (await make.member(world.boat.vesselId, 'captain')).id;
});
// Some routes end the session they are asked with.
beforeEach(async () => {
  world.captain = await make.session(world.person);
});

/** A marker that nothing holds by chance. */
const CANARY = `kanari${randomBytes(9).toString('hex')}`;
const held = () => app.logged().includes(CANARY);

const ids = (): Record<string, string> => ({
  vesselId: boat().vesselId,
  networkId: boat().networks.guest.id,
  guestId: at(boat().guests, 0).id,
  partyId: boat().partyId,
  crewMemberId: boat().crewMemberId,
});

/** The marker in every field of a route's form, and in ones it does not have. */
function marked(contract: AnyContract): Record<string, unknown> {
  const shape = (contract.body as { shape?: Record<string, unknown> } | undefined)?.shape ?? {};
  const names = [...Object.keys(shape), 'password', 'token', 'passphrase', 'name', CANARY];
  return Object.fromEntries(names.map((name) => [name, CANARY]));
}

const tell = (method: string, path: string, body: string, more: Record<string, string> = {}) =>
  net.ask(method, path, {
    headers: {
      ...ownPage(app, world.captain),
      'User-Agent': CANARY,
      Referer: `https://quayword.test/#${CANARY}`,
      'X-Request-Id': CANARY,
      ...more,
    },
    body,
  });

describe('R26: the log knows who did what, and nothing that was typed', () => {
  test.each(endpoints.map(({ contract }) => [contract.name, contract] as const))(
    '%s: not the body, the query, a header or the path',
    async (_name, contract) => {
      const path = address(contract, ids());
      const method = contract.method;
      const bodies = [JSON.stringify(marked(contract)), `{"${CANARY}`, `"${CANARY}"`];
      for (const body of method === 'GET' ? [''] : bodies)
        await tell(method, `${path}?after=${CANARY}&${CANARY}=1`, body);
      await tell(
        method,
        address(contract, { ...ids(), vesselId: CANARY, networkId: CANARY, guestId: CANARY }),
        '{}',
      );
      await tell(method, path, '{}', { Cookie: `${SESSION_COOKIE}=${CANARY}` });
      await tell(method, path, '{}', { 'X-Quayword-CSRF': CANARY, 'Idempotency-Key': `${CANARY}!` });
      await tell(method, path, CANARY, { 'Content-Type': `text/${CANARY}` });
      expect(held()).toBe(false);
    },
  );

  test('not an address that leads nowhere', async () => {
    for (const path of [
      `/api/${CANARY}`,
      `/${CANARY}.txt`,
      `/reset/${CANARY}.map`,
      `/api/vessels/%${CANARY}`,
    ])
      await tell('GET', path, '');
    expect(held()).toBe(false);
  });

  test('not the values of a statement the database refuses', async () => {
    await all.asOwner('ALTER TABLE guests ADD CONSTRAINT none CHECK (false) NOT VALID');
    await all.asOwner('ALTER TABLE parties ALTER COLUMN name TYPE varchar(10) USING left(name, 10)');
    await all.asOwner('CREATE UNIQUE INDEX one_title ON voyages((1))');
    try {
      const asked = [
        ['/guests', { partyId: boat().partyId, name: CANARY }, 500],
        [
          '/parties',
          { name: CANARY, arrivesAt: '2026-07-01T09:00:00Z', leavesAt: '2026-07-08T09:00:00Z' },
          500,
        ],
        [
          '/voyages',
          {
            kind: 'charter',
            title: CANARY,
            startsAt: '2026-07-01T09:00:00Z',
            endsAt: '2026-07-08T09:00:00Z',
          },
          201,
        ],
        [
          '/voyages',
          {
            kind: 'charter',
            title: CANARY,
            startsAt: '2026-08-01T09:00:00Z',
            endsAt: '2026-08-08T09:00:00Z',
          },
          409,
        ],
      ] as const;
      for (const [path, body, status] of asked) {
        const answer = await tell('POST', `/api${boat().base}${path}`, JSON.stringify(body));
        expect([path, answer.status]).toEqual([path, status]);
        if (status >= 400) expect(answer.text).not.toContain(CANARY);
      }
      expect(app.logged()).toContain('"23514"');
      expect(held()).toBe(false);
    } finally {
      await all.asOwner('ALTER TABLE guests DROP CONSTRAINT none');
      await all.asOwner('ALTER TABLE parties ALTER COLUMN name TYPE text');
      await all.asOwner('DROP INDEX one_title');
    }
  });

  test('not what comes from outside a request: a job’s failure', async () => {
    const { services } = app;
    const failing = services.db.transaction({ kind: 'system' }, (tx) =>
      services.db.run(tx, 'SELECT $text::int', { text: CANARY }),
    );
    const error: unknown = await failing.catch((caught: unknown) => caught);
    services.log.error({ err: { name: (error as Error).name } }, 'job failed');
    expect(held()).toBe(false);
    // What a careless line would have written down: the statement and its values are not on the error.
    expect(error).toMatchObject({ sql: '', parameters: {} });
  });

  test('a line is one record of bounded length, whatever is sent (CWE-117)', async () => {
    const hostile = [
      '\u001b[2J\u001b[31m',
      '{"level":60,"msg":"planted"}',
      '"},{"planted":true',
      'm'.repeat(100_000),
    ];
    for (const text of hostile) {
      await tell('POST', '/api/session', JSON.stringify({ email: `${text}\r\n${text}`, password: text }));
      await tell(
        'GET',
        `/api/vessels/${encodeURIComponent(text).slice(0, 8000)}/arrivals?a=%0d%0aplanted`,
        '',
      );
    }
    const lines = app.logged().split('\n');
    expect(lines.pop()).toBe('');
    for (const line of lines) {
      expect(line.length).toBeLessThan(4000);
      expect(() => JSON.parse(line) as unknown).not.toThrow();
      // biome-ignore lint/suspicious/noControlCharactersInRegex: control characters are what must not be there
      expect(line).not.toMatch(/[\u0000-\u001f\u007f]|planted/);
    }
  });

  test('says who, what, where, when and under which number', async () => {
    const before = app.logged().length;
    const answer = await net.ask('GET', `/api${boat().base}/arrivals`, {
      headers: { Cookie: ownPage(app, world.captain).Cookie ?? '' },
    });
    const line = JSON.parse(app.logged().slice(before).trim()) as Record<string, unknown>;
    expect(line).toMatchObject({
      requestId: answer.headers['x-request-id'],
      method: 'GET',
      route: 'arrivals.read',
      vessel: boat().vesselId,
      person: expect.stringMatching(/^[0-9a-f-]{36}$/),
      status: 200,
    });
    expect(Math.abs(Number(line.time) - Date.now())).toBeLessThan(60_000);
  });
});
