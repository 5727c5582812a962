import { randomUUID } from 'node:crypto';
import pg from 'pg';
import supertest from 'supertest';
import { beforeAll, describe, expect, test } from 'vitest';
import type { AnyContract } from '../../server/http/reply.ts';
import { endpoints } from '../../server/routes.ts';
import { useApp } from '../support/app.ts';
import { Client } from '../support/client.ts';
import { factories } from '../support/factories.ts';

const app = useApp();
const make = factories(app);
const contracts: readonly AnyContract[] = endpoints.map(({ contract }) => contract);

/** What must not be found in a line, with what could break a line or colour a screen around it. */
const CANARY = 'canary-of-the-log-7719';
const HOSTILE = `${CANARY}\r\n{"level":50,"event":"forged"}\u001b[31m\u0000\u2028`;
const LONG = CANARY.repeat(2000);

const world = { vesselId: '', networkId: '', captain: '' };
beforeAll(async () => {
  world.vesselId = await make.vessel();
  world.networkId = (await make.network(world.vesselId, { live: `${CANARY}-passphrase` })).id;
  world.captain = (await make.member(world.vesselId, 'captain')).id;
});

/** Signed in anew: some routes end the session they are asked by. */
const captain = async () => new Client(app, await make.session(world.captain));

const address = ({ path }: AnyContract): string =>
  path.replace(/:(\w+)/g, (_all: string, name: string) =>
    name === 'vesselId' ? world.vesselId : name === 'networkId' ? world.networkId : randomUUID(),
  );

/** Names of every field a route's body or query has, one level deep. */
const fields = ({ body, query }: AnyContract): string[] =>
  [body, query].flatMap((schema) =>
    schema && 'shape' in schema && typeof schema.shape === 'object' ? Object.keys(schema.shape ?? {}) : [],
  );

const filled = (names: readonly string[], value: unknown): object =>
  Object.fromEntries([...names, 'unknown'].map((name) => [name, value]));

function ask(client: Client, contract: AnyContract, value: unknown) {
  const path = address(contract);
  const given = filled(fields(contract), value);
  if (contract.method === 'GET') {
    const query = new URLSearchParams(
      Object.entries(given).map(([name, one]) => [name, String(one).slice(0, 500)]),
    );
    return client.get(`${path}?${query}`);
  }
  if (contract.method === 'DELETE') return client.delete(path).send(given);
  const verb = contract.method.toLowerCase() as 'post' | 'put' | 'patch';
  return client[verb](path, given);
}

interface Line {
  readonly text: string;
  readonly line: Record<string, unknown>;
}
const isRequest = ({ line }: Line): boolean => 'requestId' in line && 'status' in line;

/** The lines written while `work` ran, each read as the JSON it must be. */
async function linesOf(requests: number, work: () => Promise<void>): Promise<Line[]> {
  const before = app.logged().length;
  await work();
  const written = (): Line[] =>
    app
      .logged()
      .slice(before)
      .split('\n')
      .filter((text) => text !== '')
      .map((text) => ({ text, line: JSON.parse(text) as Line['line'] }));
  // A request's line is written once its answer is out, which may be after the client has it.
  await expect.poll(() => written().filter(isRequest).length).toBe(requests);
  return written();
}

function judge(lines: readonly Line[]): void {
  expect(lines.filter(({ text }) => text.includes('canary'))).toEqual([]);
  expect(lines.filter(({ line }) => line.event === 'forged')).toEqual([]);
  // biome-ignore lint/suspicious/noControlCharactersInRegex: they are what is looked for
  expect(lines.filter(({ text }) => /[\u0000-\u001f\u007f\u2028]/.test(text))).toEqual([]);
  expect(lines.filter(({ text }) => text.length > 4000)).toEqual([]);
}

describe('R26: what is logged (OWASP Logging Cheat Sheet)', () => {
  test('of no route is a field’s value, whatever is in it and however it fails', async () => {
    const lines = await linesOf(contracts.length * 4, async () => {
      for (const contract of contracts)
        for (const value of [HOSTILE, LONG, { [HOSTILE]: HOSTILE }, [HOSTILE]])
          await ask(await captain(), contract, value);
    });
    judge(lines);
    // Who, what, where, when, and by which number it can be found again.
    for (const { line } of lines.filter(isRequest)) {
      expect(line).toMatchObject({ requestId: expect.any(String), method: expect.any(String) });
      expect(new Date(Number(line.time)).getTime()).toBeGreaterThan(0);
    }
  }, 120_000);

  test('of an address, a header, a cookie or a body that cannot be read, nothing is', async () => {
    const lines = await linesOf(4, async () => {
      await supertest(app.app).get(`/api/${CANARY}/%0d%0a${CANARY}?${CANARY}=${CANARY}`);
      await supertest(app.app)
        .get(`/api/vessels/${CANARY}/networks`)
        .set('Cookie', `__Host-session=${CANARY}`);
      await supertest(app.app)
        .post('/api/session')
        .set({
          'Content-Type': 'application/json',
          Origin: `https://${CANARY}.example`,
          'User-Agent': CANARY,
          'X-Request-Id': CANARY,
          Referer: `https://x.example/${CANARY}`,
          Authorization: `Bearer ${CANARY}`,
        })
        .send(`{"email":"${CANARY}`);
      await supertest(app.app).get(`/${CANARY}.php`);
    });
    judge(lines);
  });

  test('of an error of the database are its name and code, without the row it quotes', async () => {
    const client = await captain();
    const owner = new pg.Client({ connectionString: app.ownerUrl });
    await owner.connect();
    try {
      await owner.query('ALTER TABLE networks ADD CONSTRAINT broken CHECK (note IS NULL) NOT VALID');
      const lines = await linesOf(1, async () => {
        // PostgreSQL quotes the failing row in the error's detail.
        await client
          .post(`/vessels/${world.vesselId}/networks`, {
            ssid: CANARY,
            audience: 'guest',
            security: 'wpa2',
            hidden: false,
            carriesEquipment: false,
            note: CANARY,
          })
          .expect(500);
      });
      judge(lines);
      const [failed] = lines.filter(({ line }) => line.msg === 'request failed');
      // 23514 is check_violation (PostgreSQL manual, appendix A).
      expect(failed?.line).toMatchObject({ code: 'internal', error: { code: '23514' } });
    } finally {
      await owner.query('ALTER TABLE networks DROP CONSTRAINT broken');
      await owner.end();
    }
  });
});
