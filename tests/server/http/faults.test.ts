import { randomUUID } from 'node:crypto';
import { connect, createServer, type Socket } from 'node:net';
import { Client } from 'pg';
import supertest from 'supertest';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { createApp } from '../../../server/app.ts';
import { Database } from '../../../server/db/connection.ts';
import { useApp } from '../../support/app.ts';
import { type Boat, boats } from '../../support/boat.ts';
import { factories } from '../../support/factories.ts';
import { contents } from './contents.ts';
import { ownPage, sessionCookie, wire } from './wire.ts';

const app = useApp();
const make = factories(app);
const net = wire(app);
const all = contents(app);
const world: { boat?: Boat; captain: string; own?: Client } = { captain: '' };
const boat = (): Boat => {
  if (!world.boat) throw new Error('The boat is made before the tests');
  return world.boat;
};

beforeAll(async () => {
  world.boat = await boats(app).boat();
  world.captain = await make.session((await make.member(world.boat.vesselId, 'captain')).id);
  world.own = new Client({ connectionString: app.appUrl });
  await world.own.connect();
});
afterAll(async () => {
  await world.own?.end();
});

const arrivals = () =>
  net.ask('GET', `/api${boat().base}/arrivals`, { headers: { Cookie: sessionCookie(app, world.captain) } });
const guest = (name: string, key: string = randomUUID()) =>
  net.ask('POST', `/api${boat().base}/guests`, {
    headers: { ...ownPage(app, world.captain), 'Idempotency-Key': key },
    body: JSON.stringify({ partyId: boat().partyId, name }),
  });
const count = async (name: string) =>
  (await all.asOwner<{ n: number }>('SELECT count(*)::int AS n FROM guests WHERE name = $1', [name]))[0]?.n;

/** Ends the server's connections, all of them or those that wait for a lock; a role may end its own. */
const endConnections = async (which: 'all' | 'waiting' = 'all') =>
  world.own?.query<{ ended: boolean }>(
    `SELECT pg_terminate_backend(pid) AS ended FROM pg_stat_activity
     WHERE datname = current_database() AND pid <> pg_backend_pid() AND application_name LIKE 'quayword%'
       ${which === 'waiting' ? "AND wait_event_type = 'Lock'" : ''}`,
  );

/** Lets the test's database take new connections or none; said from another one, as it must be. */
async function taking(connections: boolean): Promise<void> {
  const url = new URL(app.ownerUrl);
  const name = url.pathname.slice(1);
  url.pathname = '/postgres';
  const owner = new Client({ connectionString: url.href });
  await owner.connect();
  try {
    await owner.query(`ALTER DATABASE ${owner.escapeIdentifier(name)} ALLOW_CONNECTIONS ${connections}`);
  } finally {
    await owner.end();
  }
}

/** Until what is asked answers true, or the test's own time is over. */
async function until(ask: () => Promise<boolean>): Promise<void> {
  while (!(await ask())) await new Promise((turn) => setImmediate(turn));
}

/** Whether a statement of the server waits for a lock. Asked outside transactions, which keep to what they saw first. */
const waiting = async () => {
  const found = await world.own?.query(
    `SELECT 1 FROM pg_stat_activity
     WHERE datname = current_database() AND wait_event_type = 'Lock' AND application_name = 'quayword'`,
  );
  return found?.rowCount === 1;
};

describe('R53: the database goes away and comes back', () => {
  test('connections that ended while nobody used them are replaced', async () => {
    expect((await arrivals()).status).toBe(200);
    const ended = await endConnections();
    expect(ended?.rowCount).toBeGreaterThan(0);
    await until(async () => (await arrivals()).status === 200);
    expect((await Promise.all(Array.from({ length: 20 }, arrivals))).map(({ status }) => status)).toEqual(
      Array.from({ length: 20 }, () => 200),
    );
  });

  test('one that ends in the middle of a change: 503 with when to try again, nothing written, once when repeated', async () => {
    const key = randomUUID();
    await all.asOwner('BEGIN');
    await all.asOwner('LOCK TABLE guests IN ACCESS EXCLUSIVE MODE');
    const asking = guest('Ended Halfway', key);
    try {
      await until(waiting);
      expect((await endConnections('waiting'))?.rows).toEqual([{ ended: true }]);
      const answer = await asking;
      expect([answer.status, answer.code]).toEqual([503, 'unavailable']);
      expect(Number(answer.headers['retry-after'])).toBeGreaterThan(0);
    } finally {
      await all.asOwner('ROLLBACK');
    }
    expect(await count('Ended Halfway')).toBe(0);
    expect((await guest('Ended Halfway', key)).status).toBe(201);
    expect((await guest('Ended Halfway', key)).status).toBe(201);
    expect(await count('Ended Halfway')).toBe(1);
  });

  test('no connection to be had: 503 everywhere, the process stays, and it serves again by itself', async () => {
    await taking(false);
    try {
      await endConnections();
      for (const asking of [arrivals, () => guest('Nobody'), () => net.ask('GET', '/api/health')]) {
        const answer = await asking();
        expect([answer.status, answer.code]).toEqual([503, 'unavailable']);
        expect(Number(answer.headers['retry-after'])).toBeGreaterThan(0);
      }
    } finally {
      await taking(true);
    }
    await until(async () => (await arrivals()).status === 200);
    expect((await net.ask('GET', '/api/health')).status).toBe(200);
    expect((await guest('After It All')).status).toBe(201);
  });

  test('a COMMIT whose answer is lost is found by its key, and not done again', async () => {
    const upstream = new URL(app.appUrl);
    const sockets: Socket[] = [];
    let losing = false;
    const between = createServer((near) => {
      const far = connect(Number(upstream.port), upstream.hostname);
      sockets.push(near, far);
      for (const socket of [near, far]) socket.on('error', () => undefined);
      near.on('data', (octets) => {
        const commits = losing && octets.includes('COMMIT');
        far.write(octets);
        // The database has the COMMIT; its answer finds nobody.
        if (commits) near.destroy();
      });
      far.on('data', (octets) => near.write(octets));
      near.once('close', () => far.end());
      far.once('close', () => near.destroy());
    });
    await new Promise<void>((ready) => between.listen(0, '127.0.0.1', ready));
    const address = between.address();
    const url = new URL(app.appUrl);
    url.hostname = '127.0.0.1';
    url.port = String(typeof address === 'object' && address !== null ? address.port : 0);
    const db = new Database(url.href, { poolMax: 2 });
    const served = createApp({ ...app.services, db });
    const key = randomUUID();
    const ask = () =>
      supertest(served)
        .post(`/api${boat().base}/guests`)
        .set({ ...ownPage(app, world.captain), 'Idempotency-Key': key })
        .send({ partyId: boat().partyId, name: 'Answer Lost' });
    try {
      losing = true;
      const first = await ask();
      expect([first.status, first.headers['retry-after']]).toEqual([503, '3']);
      losing = false;
      await until(async () => (await count('Answer Lost')) === 1);
      const second = await ask();
      expect(second.status).toBe(201);
      const third = await ask();
      expect(third.body).toEqual(second.body);
      expect(await count('Answer Lost')).toBe(1);
    } finally {
      await db.close();
      for (const socket of sockets) socket.destroy();
      await new Promise((done) => between.close(done));
    }
  });
});

describe('R54: a pool of five', () => {
  test('fifty transactions at once all end', async () => {
    const db = new Database(app.appUrl, { poolMax: 5, refuseNested: true });
    try {
      const served = createApp({ ...app.services, db });
      const answers = await Promise.all(
        Array.from({ length: 50 }, (_, index) =>
          index % 2 === 0
            ? supertest(served)
                .get(`/api${boat().base}/arrivals`)
                .set('Cookie', sessionCookie(app, world.captain))
            : supertest(served)
                .post(`/api${boat().base}/guests`)
                .set(ownPage(app, world.captain))
                .send({ partyId: boat().partyId, name: `At Once ${index}` }),
        ),
      );
      expect(answers.map(({ status }) => status)).toEqual(
        Array.from({ length: 50 }, (_, index) => (index % 2 === 0 ? 200 : 201)),
      );
    } finally {
      await db.close();
    }
  });

  test('with all of it lent, a request is refused in seconds and health still answers', async () => {
    const db = new Database(app.appUrl, { poolMax: 5 });
    const served = createApp({ ...app.services, db });
    let release: () => void = () => undefined;
    const held = new Promise<void>((resolve) => (release = resolve));
    const lent = Array.from({ length: 5 }, () =>
      db.transaction({ kind: 'none' }, async (tx) => {
        await db.rows(tx, 'SELECT 1');
        await held;
      }),
    );
    try {
      const began = performance.now();
      const answer = await supertest(served)
        .get(`/api${boat().base}/arrivals`)
        .set('Cookie', sessionCookie(app, world.captain));
      expect([answer.status, answer.body.code, answer.headers['retry-after']]).toEqual([
        503,
        'unavailable',
        '3',
      ]);
      expect(performance.now() - began).toBeGreaterThan(2_500);
      await supertest(served).get('/api/health').expect(200);
      release();
      await Promise.all(lent);
      await supertest(served)
        .get(`/api${boat().base}/arrivals`)
        .set('Cookie', sessionCookie(app, world.captain))
        .expect(200);
    } finally {
      release();
      await db.close();
    }
  });

  test('a transaction inside another is refused before it can wait for itself', async () => {
    const { db } = app.services;
    const nested = db.transaction({ kind: 'none' }, () => db.transaction({ kind: 'none' }, async () => 1));
    await expect(nested).rejects.toThrow('inside another');
  });

  test('a statement of a transaction that is over goes nowhere', async () => {
    const { db } = app.services;
    const over = await db.transaction({ kind: 'system' }, async (tx) => tx);
    await expect(db.rows(over, 'SELECT 1')).rejects.toThrow('over');
  });

  test('a statement that failed and was passed over cannot end as if all were well', async () => {
    const { db } = app.services;
    const ending = db.transaction({ kind: 'system' }, async (tx) => {
      await db.run(tx, 'SELECT 1/0').catch(() => undefined);
    });
    await expect(ending).rejects.toThrow('passed over');
  });
});
