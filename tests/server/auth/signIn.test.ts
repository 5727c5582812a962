import argon2 from 'argon2';
import { describe, expect, test, vi } from 'vitest';
import { SESSION_COOKIE, sha256 } from '../../../server/http/session.ts';
import { useApp } from '../../support/app.ts';
import { factories } from '../../support/factories.ts';
import { Browser, setCookies, setPassword, sql } from './browser.ts';

const app = useApp();
const make = factories(app);
const PASSWORD = 'brass lamp over water';

async function someone(name?: string) {
  const person = await make.person({ name });
  await setPassword(app, person.id, PASSWORD);
  return person;
}

const mailsTo = (email: string) =>
  sql<{ kind: string }>(app, 'SELECT kind FROM mail_outbox WHERE recipient = $email ORDER BY created_at', {
    email,
  });

describe('signing in', () => {
  test('opens a session with the right password and with no other', async () => {
    const person = await someone('Ilse Kramer');
    const browser = new Browser(app);
    expect((await browser.signIn(person.email, 'brass lamp over wine')).status).toBe(401);
    expect(browser.signedIn).toBe(false);
    expect((await browser.get('/session')).status).toBe(401);

    const answer = await browser.signIn(person.email.toUpperCase(), PASSWORD);
    expect(answer.status).toBe(200);
    expect(answer.body).toEqual({ endedOldest: false });
    const session = await browser.get('/session');
    expect(session.body.person).toMatchObject({ name: 'Ilse Kramer', email: person.email });
  });

  test('R2: takes the password to the octet: no trimming, no cutting, no case folding', async () => {
    const person = await someone();
    const browser = new Browser(app);
    for (const near of [`${PASSWORD} `, ` ${PASSWORD}`, PASSWORD.toUpperCase(), PASSWORD.slice(0, -1)]) {
      expect((await browser.signIn(person.email, near)).status, JSON.stringify(near)).toBe(401);
    }
    expect((await browser.signIn(person.email, PASSWORD)).status).toBe(200);
  });

  test('R2: more than 128 characters are refused before anything is hashed', async () => {
    const person = await someone();
    const browser = new Browser(app);
    const verify = vi.spyOn(argon2, 'verify');
    const answer = await browser.signIn(person.email, 'x'.repeat(129));
    expect(answer.status).toBe(422);
    expect(answer.body.errors.password).toBeDefined();
    expect(verify).not.toHaveBeenCalled();
    await browser.signIn(person.email, 'x'.repeat(128));
    expect(verify).toHaveBeenCalledTimes(1);
    verify.mockRestore();
    const huge = await browser.signIn(person.email, 'x'.repeat(1024 * 1024));
    expect([413, 422]).toContain(huge.status);
  });

  test('R8: the cookie is __Host-, Secure, HttpOnly, SameSite=Strict, for the whole site and no domain', async () => {
    const person = await someone();
    const browser = new Browser(app);
    const answer = await browser.signIn(person.email, PASSWORD);
    for (const line of setCookies(answer)) {
      expect(line).toMatch(/^__Host-/);
      for (const mark of ['Secure', 'HttpOnly', 'SameSite=Strict', 'Path=/']) expect(line).toContain(mark);
      expect(line).not.toMatch(/domain=/i);
    }
    expect(setCookies(answer).some((line) => line.startsWith(`${SESSION_COOKIE}=`))).toBe(true);
  });

  test('R8: a new id each time, kept only as a hash, never in a body; an id planted before is not adopted', async () => {
    const person = await someone();
    const browser = new Browser(app);
    await browser.signIn(person.email, PASSWORD);
    const first = sessionIdOf(browser);
    await browser.signIn(person.email, PASSWORD);
    const second = sessionIdOf(browser);
    expect(second).not.toBe(first);
    expect(Buffer.from(second, 'base64url').length).toBeGreaterThanOrEqual(16);
    const rows = await sql<{ id_hash: Buffer }>(app, 'SELECT id_hash FROM sessions WHERE person_id = $id', {
      id: person.id,
    });
    const hashes = rows.map((row) => row.id_hash.toString('hex'));
    expect(hashes).toContain(sha256(second).toString('hex'));
    for (const answer of app.recorded) expect(answer.text).not.toContain(second);
    expect(app.logged()).not.toContain(second);
  });

  test('R8: signing in ends the session the browser had before', async () => {
    const person = await someone();
    const browser = new Browser(app);
    await browser.signIn(person.email, PASSWORD);
    const old = browser.stolen();
    expect((await old.get('/session')).status).toBe(200);
    await browser.signIn(person.email, PASSWORD);
    expect((await old.get('/session')).status).toBe(401);
    expect((await browser.get('/session')).status).toBe(200);
  });

  test('R31: another site cannot sign a browser in', async () => {
    const person = await someone();
    const { default: supertest } = await import('supertest');
    const body = { email: person.email, password: PASSWORD };
    const foreign = await supertest(app.app)
      .post('/api/session')
      .set('Origin', 'https://else.example')
      .send(body);
    expect(foreign.status).toBe(403);
    const none = await supertest(app.app).post('/api/session').send(body);
    expect(none.status).toBe(403);
    const cross = await supertest(app.app)
      .post('/api/session')
      .set('Origin', app.origin)
      .set('Sec-Fetch-Site', 'cross-site')
      .send(body);
    expect(cross.status).toBe(403);
    expect((await new Browser(app).signIn(person.email, PASSWORD)).status).toBe(200);
  });

  test('R9: the sixth session ends the oldest and says so; the other four live on', async () => {
    const person = await someone();
    const browsers = Array.from({ length: 6 }, () => new Browser(app));
    const answers = [];
    for (const browser of browsers) {
      answers.push(await browser.signIn(person.email, PASSWORD));
      app.clock.advance(1_000);
    }
    expect(answers.map((answer) => answer.body.endedOldest)).toEqual([
      false,
      false,
      false,
      false,
      false,
      true,
    ]);
    const alive = await Promise.all(browsers.map(async (browser) => (await browser.get('/session')).status));
    expect(alive).toEqual([401, 200, 200, 200, 200, 200]);
  });

  test('R9: six sign-ins at one moment still leave five sessions', async () => {
    const person = await someone();
    const browsers = Array.from({ length: 7 }, () => new Browser(app));
    const answers = await Promise.all(browsers.map((browser) => browser.signIn(person.email, PASSWORD)));
    expect(answers.every((answer) => answer.status === 200)).toBe(true);
    const rows = await sql(app, 'SELECT 1 FROM sessions WHERE person_id = $id AND ended_at IS NULL', {
      id: person.id,
    });
    expect(rows).toHaveLength(5);
  });

  test('a disabled person cannot sign in, and their session ends with the next request (R9)', async () => {
    const person = await someone();
    const browser = new Browser(app);
    await browser.signIn(person.email, PASSWORD);
    await sql(app, 'UPDATE people SET disabled_at = $now WHERE id = $id', {
      id: person.id,
      now: app.clock.now(),
    });
    expect((await browser.get('/session')).status).toBe(401);
    expect((await new Browser(app).signIn(person.email, PASSWORD)).status).toBe(401);
    await sql(app, 'UPDATE people SET disabled_at = NULL WHERE id = $id', { id: person.id });
    expect((await new Browser(app).signIn(person.email, PASSWORD)).status).toBe(200);
  });

  test('a browser nobody knows is told of by mail, the first one and a known one are not', async () => {
    const person = await someone();
    const first = new Browser(app);
    await first.signIn(person.email, PASSWORD);
    expect(await mailsTo(person.email)).toEqual([]);
    await first.laterVisit().signIn(person.email, PASSWORD);
    expect(await mailsTo(person.email)).toEqual([]);
    app.clock.advance(1_000);
    await new Browser(app).signIn(person.email, PASSWORD);
    expect(await mailsTo(person.email)).toHaveLength(1);
  });
});

describe('signing out', () => {
  test('R9: ends the session on the server, so that a kept cookie is worth nothing; the neighbour stays', async () => {
    const person = await someone();
    const browser = new Browser(app);
    const neighbour = new Browser(app);
    await browser.signIn(person.email, PASSWORD);
    await neighbour.signIn(person.email, PASSWORD);
    const kept = browser.stolen();
    const answer = await browser.delete('/session');
    expect(answer.status).toBe(204);
    expect(answer.headers['clear-site-data']).toBe('"cache", "storage"');
    expect(browser.signedIn).toBe(false);
    expect((await kept.get('/session')).status).toBe(401);
    expect((await neighbour.get('/session')).status).toBe(200);
  });

  test('R31: needs the session’s own token', async () => {
    const person = await someone();
    const [one, other] = [new Browser(app), new Browser(app)];
    await one.signIn(person.email, PASSWORD);
    await other.signIn(person.email, PASSWORD);
    const { default: supertest } = await import('supertest');
    const foreign = (await other.get('/session')).body.csrf as string;
    for (const token of [undefined, 'x'.repeat(43), foreign]) {
      const request = supertest(app.app)
        .delete('/api/session')
        .set('Origin', app.origin)
        .set('Cookie', `${SESSION_COOKIE}=${one.sessionCookie}`);
      if (token !== undefined) request.set('X-Quayword-CSRF', token);
      expect((await request).status).toBe(403);
    }
    expect((await one.get('/session')).status).toBe(200);
    expect((await one.delete('/session')).status).toBe(204);
  });

  test('everywhere: every session ends and no browser is known any more', async () => {
    const person = await someone();
    const stranger = await someone();
    const [one, other, neighbour] = [new Browser(app), new Browser(app), new Browser(app)];
    await one.signIn(person.email, PASSWORD);
    await other.signIn(person.email, PASSWORD);
    await neighbour.signIn(stranger.email, PASSWORD);
    const answer = await one.delete('/account/sessions');
    expect(answer.status).toBe(204);
    expect(answer.headers['clear-site-data']).toBe('"cache", "storage"');
    expect((await other.get('/session')).status).toBe(401);
    expect((await neighbour.get('/session')).status).toBe(200);
    expect(await sql(app, 'SELECT 1 FROM known_devices WHERE person_id = $id', { id: person.id })).toEqual(
      [],
    );
  });
});

/** The id that a browser's cookie names, read without checking the signature. */
function sessionIdOf(browser: Browser): string {
  const [, payload = ''] = browser.sessionCookie.split('.');
  const claims: unknown = JSON.parse(Buffer.from(payload, 'base64url').toString());
  if (typeof claims !== 'object' || claims === null || !('sid' in claims))
    throw new Error('no id in the cookie');
  return String(claims.sid);
}
