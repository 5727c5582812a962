import { describe, expect, test } from 'vitest';
import { createApp } from '../../../server/app.ts';
import { Database } from '../../../server/db/connection.ts';
import { type TestApp, useApp } from '../../support/app.ts';
import { factories } from '../../support/factories.ts';
import { Browser, setPassword, sql } from './browser.ts';

const app = useApp();
const make = factories(app);
const PASSWORD = 'seven gulls on the mole';
const MINUTE = 60_000;

async function someone() {
  const person = await make.person();
  await setPassword(app, person.id, PASSWORD);
  return person;
}

/** Wrong tries until they are turned away; how many were looked at. */
async function guessUntilClosed(email: string, browser = new Browser(app), most = 60) {
  for (let tries = 0; tries < most; tries += 1) {
    const answer = await browser.signIn(email, `guess number ${tries}`);
    if (answer.status === 429) return { tries, answer };
    expect(answer.status).toBe(401);
  }
  throw new Error('never closed');
}

describe('R3: guessing', () => {
  test('one account is closed to strangers for a while that grows; a success forgets it', async () => {
    const person = await someone();
    const first = await guessUntilClosed(person.email);
    expect(first.tries).toBeGreaterThanOrEqual(5);
    expect(first.tries).toBeLessThanOrEqual(10);
    const wait = Number(first.answer.headers['retry-after']);
    expect(wait).toBeGreaterThan(0);
    // The right password does not open it either, so a guess that hits tells nothing.
    expect((await new Browser(app).signIn(person.email, PASSWORD)).status).toBe(429);

    let before = wait;
    for (let round = 0; round < 3; round += 1) {
      app.clock.advance(before * 1_000);
      const again = await guessUntilClosed(person.email);
      expect(again.tries).toBe(1);
      const longer = Number(again.answer.headers['retry-after']);
      expect(longer).toBeGreaterThan(before);
      before = longer;
    }
    app.clock.advance(before * 1_000);
    expect((await new Browser(app).signIn(person.email, PASSWORD)).status).toBe(200);
    expect((await new Browser(app).signIn(person.email, 'one slip')).status).toBe(401);
    expect((await new Browser(app).signIn(person.email, PASSWORD)).status).toBe(200);
  });

  test('from many addresses is counted together; the innocent neighbour signs in meanwhile', async () => {
    const [person, neighbour] = [await someone(), await someone()];
    let closed = 0;
    for (let host = 2; host < 16; host += 1) {
      const answer = await new Browser(app, { address: `127.0.7.${host}` }).signIn(person.email, 'a guess');
      if (answer.status === 429) closed += 1;
    }
    expect(closed).toBeGreaterThan(0);
    expect((await new Browser(app, { address: '127.0.8.1' }).signIn(neighbour.email, PASSWORD)).status).toBe(
      200,
    );
  });

  test('cannot lock the real person out: a browser that signed in before still gets in', async () => {
    const person = await someone();
    const own = new Browser(app);
    expect((await own.signIn(person.email, PASSWORD)).status).toBe(200);
    await guessUntilClosed(person.email, new Browser(app, { address: '127.0.9.1' }));
    expect((await new Browser(app).signIn(person.email, PASSWORD)).status).toBe(429);
    expect((await own.laterVisit().signIn(person.email, PASSWORD)).status).toBe(200);
  });

  test('from a known browser is stopped too, and does not count against the person elsewhere', async () => {
    const person = await someone();
    const stolen = new Browser(app, { address: '127.0.10.1' });
    const other = new Browser(app, { address: '127.0.10.2' });
    await stolen.signIn(person.email, PASSWORD);
    await other.signIn(person.email, PASSWORD);
    await guessUntilClosed(person.email, stolen.laterVisit());
    expect((await other.laterVisit().signIn(person.email, PASSWORD)).status).toBe(200);
  });

  test('another person’s known browser opens nothing', async () => {
    const [person, thief] = [await someone(), await someone()];
    const browser = new Browser(app, { address: '127.0.11.1' });
    await browser.signIn(thief.email, PASSWORD);
    await guessUntilClosed(person.email, new Browser(app, { address: '127.0.11.2' }));
    expect((await browser.laterVisit().signIn(person.email, PASSWORD)).status).toBe(429);
  });

  test('one password over many accounts closes the address', async () => {
    const browser = new Browser(app, { address: '127.0.12.1' });
    let closedAfter = 0;
    for (let tries = 1; tries <= 40 && closedAfter === 0; tries += 1) {
      const answer = await browser.signIn(`nobody${tries}@spray.example`, 'Summer on the sea');
      if (answer.status === 429) closedAfter = tries;
    }
    expect(closedAfter).toBeGreaterThan(10);
    const person = await someone();
    expect((await browser.signIn(person.email, PASSWORD)).status).toBe(429);
    expect((await new Browser(app, { address: '127.0.12.2' }).signIn(person.email, PASSWORD)).status).toBe(
      200,
    );
    app.clock.advance(20 * MINUTE);
  });

  test('everywhere at once raises one alarm and closes sign-in to strangers, not to known browsers', async () => {
    const person = await someone();
    const own = new Browser(app, { address: '127.0.13.1' });
    await own.signIn(person.email, PASSWORD);
    // As if four hundred had failed a moment ago: hashing so many would only slow this test.
    await sql(
      app,
      `INSERT INTO throttles(key, failures, window_from) VALUES ('everybody', 399, $now)
       ON CONFLICT (key) DO UPDATE SET failures = 399, window_from = $now, blocked_until = NULL`,
      { now: app.clock.now() },
    );
    const mark = app.logged().length;
    expect(
      (await new Browser(app, { address: '127.0.13.2' }).signIn('one@more.example', 'marker guess')).status,
    ).toBe(401);
    const alarms = app
      .logged()
      .slice(mark)
      .split('\n')
      .filter((line) => line.includes('"event":"throttled"') && line.includes('"everybody"'));
    expect(alarms).toHaveLength(1);
    expect((await new Browser(app, { address: '127.0.13.3' }).signIn(person.email, PASSWORD)).status).toBe(
      429,
    );
    expect((await own.laterVisit().signIn(person.email, PASSWORD)).status).toBe(200);
    await sql(app, "DELETE FROM throttles WHERE key = 'everybody'");
  });

  test('is remembered by another server and after a restart', async () => {
    const person = await someone();
    await guessUntilClosed(person.email, new Browser(app, { address: '127.0.14.1' }));
    const db = new Database(app.appUrl, { poolMax: 2 });
    try {
      const services = { ...app.services, db };
      const second = { ...pick(app), app: createApp(services), services } satisfies TestApp;
      const browser = new Browser(second, { address: '127.0.14.2' });
      expect((await browser.signIn(person.email, PASSWORD)).status).toBe(429);
    } finally {
      await db.close();
    }
  });

  test('writes no password and no address of mail to the log', async () => {
    const person = await someone();
    for (let tries = 0; tries < 3; tries += 1)
      await new Browser(app, { address: '127.0.15.1' }).signIn(person.email, 'marker-guess-7613');
    expect(app.logged()).not.toContain('marker-guess-7613');
    expect(app.logged()).not.toContain(person.email);
    expect(app.logged()).not.toContain(PASSWORD);
  });
});

const pick = (test: TestApp): TestApp => ({
  app: test.app,
  services: test.services,
  clock: test.clock,
  queue: test.queue,
  ownerUrl: test.ownerUrl,
  appUrl: test.appUrl,
  logged: test.logged,
  origin: test.origin,
  recorded: test.recorded,
  sessionIds: test.sessionIds,
  headsSeen: test.headsSeen,
  spoilsLogs: test.spoilsLogs,
});
