import supertest from 'supertest';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { useApp } from '../../support/app.ts';
import { factories } from '../../support/factories.ts';
import { type MailServer, startMailServer } from '../mail/mailServer.ts';
import { deliver, tokenOf } from '../mail/outbox.ts';
import { Browser, codeAt, setPassword, sql } from './browser.ts';

const app = useApp();
const make = factories(app);
const PASSWORD = 'slack water at noon';
const NEXT = 'first light over the pier';
const holder: { server?: MailServer } = {};
const mails = () => {
  if (!holder.server) throw new Error('no mail server yet');
  return deliver(app, holder.server);
};

beforeAll(async () => {
  holder.server = await startMailServer();
});
afterAll(() => holder.server?.close());

async function someone() {
  const person = await make.person();
  await setPassword(app, person.id, PASSWORD);
  return person;
}

/** The address of one asker in 127.0.0.0/8, so that a test's letters do not count against the next one's. */
let host = 0;
const asker = () => {
  host += 1;
  return new Browser(app, { address: `127.0.30.${host}` });
};

async function askedToken(email: string): Promise<string> {
  expect((await asker().post('/password-resets', { email })).status).toBe(204);
  const mail = (await mails()).find(
    ({ to, parsed }) => to.includes(email) && parsed.subject === 'Set a new password for Quayword',
  );
  return tokenOf(mail);
}
const use = (token: string, password = NEXT) =>
  new Browser(app).post('/password-resets/use', { token, password });

describe('R5: a password reset', () => {
  test('sets the new password once, ends every session, mails a notice, and signs nobody in', async () => {
    const person = await someone();
    const open = new Browser(app);
    await open.signIn(person.email, PASSWORD);
    const token = await askedToken(person.email);
    expect(Buffer.from(token, 'base64url').length).toBeGreaterThanOrEqual(16);

    const browser = new Browser(app);
    const answer = await browser.post('/password-resets/use', { token, password: NEXT });
    expect(answer.status).toBe(204);
    expect(browser.signedIn).toBe(false);
    expect((await open.get('/session')).status).toBe(401);
    expect((await new Browser(app).signIn(person.email, PASSWORD)).status).toBe(401);
    expect((await new Browser(app).signIn(person.email, NEXT)).status).toBe(200);
    const [notice] = await mails();
    expect(notice?.to).toEqual([person.email]);
    expect(notice?.parsed.subject).toMatch(/password was changed/);
    expect(notice?.parsed.text).not.toContain(NEXT);

    expect((await use(token, 'quite another one')).status).toBe(410);
    expect((await new Browser(app).signIn(person.email, NEXT)).status).toBe(200);
  });

  test('is kept only as a hash', async () => {
    const person = await someone();
    const token = await askedToken(person.email);
    for (const table of ['password_resets', 'mail_outbox', 'pgboss.job']) {
      const rows = await sql<{ all: string }>(app, `SELECT t::text AS all FROM ${table} t`);
      for (const { all } of rows) {
        expect(all).not.toContain(token);
        expect(all).not.toContain(Buffer.from(token).toString('hex'));
      }
    }
  });

  test('works for fifteen minutes and not a second longer', async () => {
    const person = await someone();
    const early = await askedToken(person.email);
    app.clock.advance(15 * 60_000 - 1_000);
    expect((await use(early)).status).toBe(204);
    await mails();
    const late = await askedToken(person.email);
    app.clock.advance(15 * 60_000 + 1_000);
    expect((await use(late)).status).toBe(410);
  });

  test('the newest link only', async () => {
    const person = await someone();
    const first = await askedToken(person.email);
    const second = await askedToken(person.email);
    expect((await use(first)).status).toBe(410);
    expect((await use(second)).status).toBe(204);
    await mails();
  });

  test('a link used fifty times at one moment works once', async () => {
    const person = await someone();
    const token = await askedToken(person.email);
    const answers = await Promise.all(
      Array.from({ length: 50 }, (_, index) => use(token, `${NEXT} ${index}`)),
    );
    expect(answers.filter((answer) => answer.status === 204)).toHaveLength(1);
    for (const answer of answers) expect([204, 410, 503]).toContain(answer.status);
    await mails();
  });

  test('guessed, changed and cut-off tokens open nothing', async () => {
    const person = await someone();
    const token = await askedToken(person.email);
    const changed = (token.startsWith('A') ? 'B' : 'A') + token.slice(1);
    for (const wrong of [changed, token.slice(0, -1), 'x'.repeat(43)]) {
      expect((await use(wrong)).status, wrong).toBe(410);
    }
    for (const wrong of ['', "' OR true --", 'x'.repeat(101)])
      expect((await use(wrong)).status, wrong).toBe(422);
    expect((await use(token)).status).toBe(204);
    await mails();
  });

  test('an easy password is refused and the link still works', async () => {
    const person = await make.member(await make.vessel({ name: 'Sea Lavender' }), 'purser');
    await setPassword(app, person.id, PASSWORD);
    const token = await askedToken(person.email);
    for (const easy of ['password', 'sea lavender', person.email, 'short', 'x'.repeat(129)]) {
      expect((await use(token, easy)).status, easy).toBe(422);
    }
    expect((await use(token)).status).toBe(204);
    await mails();
  });

  test('the link’s host is ours whatever the request says, and opening it as a scanner does changes nothing', async () => {
    const person = await someone();
    const answer = await supertest(app.app)
      .post('/api/password-resets')
      .set('Origin', app.origin)
      .set('Host', 'evil.example')
      .set('X-Forwarded-Host', 'evil.example')
      .send({ email: person.email });
    expect(answer.status).toBe(204);
    const [mail] = await mails();
    expect(mail?.raw).not.toContain('evil.example');
    const token = tokenOf(mail);
    for (const path of [
      '/reset/new',
      `/api/password-resets/use?token=${token}`,
      '/api/password-resets/use',
    ]) {
      await supertest(app.app).get(path);
      await supertest(app.app).head(path);
    }
    expect((await use(token)).status).toBe(204);
    await mails();
  });

  test('the second factor stays and is asked for afterwards', async () => {
    const person = await someone();
    const browser = new Browser(app);
    await browser.signIn(person.email, PASSWORD);
    const { secret } = (await browser.post('/account/second-factor')).body as { secret: string };
    await browser.put('/account/second-factor', { code: codeAt(secret, app.clock.now()) });
    app.clock.advance(30_000);
    expect((await use(await askedToken(person.email))).status).toBe(204);
    await mails();
    const asked = await new Browser(app).signIn(person.email, NEXT);
    expect(asked.body.code).toBe('code_needed');
    const code = codeAt(secret, app.clock.now());
    expect((await new Browser(app).signIn(person.email, NEXT, code)).status).toBe(200);
  });

  test('R4: known, unknown and disabled addresses answer the same; only the known one gets mail', async () => {
    const person = await someone();
    const disabled = await someone();
    await sql(app, 'UPDATE people SET disabled_at = $now WHERE id = $id', {
      id: disabled.id,
      now: app.clock.now(),
    });
    await mails();
    const shapes = [];
    for (const email of [person.email, disabled.email, 'nobody@else.example', 'not an address']) {
      const answer = await asker().post('/password-resets', { email });
      const { 'x-request-id': _one, date: _two, ...headers } = answer.headers as Record<string, string>;
      shapes.push({ status: answer.status, text: answer.text, headers });
    }
    for (const shape of shapes) expect(shape).toEqual(shapes[0]);
    const sent = await mails();
    expect(sent.map((mail) => mail.to)).toEqual([[person.email]]);
  });

  test('nobody’s mailbox can be flooded, and the answer does not tell', async () => {
    const person = await someone();
    for (let times = 0; times < 8; times += 1) {
      expect((await asker().post('/password-resets', { email: person.email })).status).toBe(204);
    }
    expect(await mails()).toHaveLength(5);
    app.clock.advance(3_600_000 + 1_000);
    expect((await use(await askedToken(person.email))).status).toBe(204);
    await mails();
  });

  test('one address that asks for very many is asked to wait; another is not', async () => {
    const browser = new Browser(app, { address: '127.0.31.1' });
    const asked = [];
    for (let times = 0; times < 17; times += 1) {
      asked.push((await browser.post('/password-resets', { email: `nobody${times}@else.example` })).status);
    }
    expect(asked.at(0)).toBe(204);
    expect(asked.at(-1)).toBe(429);
    expect((await asker().post('/password-resets', { email: 'nobody@else.example' })).status).toBe(204);
  });
});
