import { describe, expect, test } from 'vitest';
import { deviceLabel } from '../../../server/auth/sessions.ts';
import { useApp } from '../../support/app.ts';
import { factories } from '../../support/factories.ts';
import { Browser, setPassword, sql } from './browser.ts';

const app = useApp();
const make = factories(app);
const PASSWORD = 'green buoy to starboard';
const NEXT = 'two bells and a foghorn';
const TABLET =
  'Mozilla/5.0 (Linux; Android 14; SM-T500) AppleWebKit/537.36 (KHTML, like Gecko) Chrome/126.0.0.0 Safari/537.36';
const PHONE =
  'Mozilla/5.0 (iPhone; CPU iPhone OS 17_5 like Mac OS X) AppleWebKit/605.1.15 (KHTML, like Gecko) Version/17.5 Mobile/15E148 Safari/604.1';

async function signedIn(userAgent = TABLET) {
  const person = await make.person();
  await setPassword(app, person.id, PASSWORD);
  const browser = new Browser(app, { userAgent });
  await browser.signIn(person.email, PASSWORD);
  return { person, browser };
}

describe('one’s own account', () => {
  test('name and language are changed by oneself, and nobody else’s are', async () => {
    const { browser } = await signedIn();
    const neighbour = await signedIn();
    expect((await browser.patch('/account', { name: 'Ilse Kramer-Bos', locale: 'nl' })).status).toBe(204);
    expect((await browser.get('/session')).body.person).toMatchObject({
      name: 'Ilse Kramer-Bos',
      locale: 'nl',
    });
    expect((await neighbour.browser.get('/session')).body.person.locale).toBe('en');
    for (const wrong of [
      { name: '', locale: 'nl' },
      { name: 'a'.repeat(121), locale: 'nl' },
      { name: 'Ilse', locale: 'xx' },
      { name: 'Ilse', locale: 'nl', email: 'else@crew.example' },
    ]) {
      expect((await browser.patch('/account', wrong)).status).toBe(422);
    }
    expect((await browser.patch('/account', { name: 'a'.repeat(120), locale: 'nl' })).status).toBe(204);
  });

  test('R8: a changed password gives this session a new id, ends the others, and does not count as a fresh proof', async () => {
    const { person, browser } = await signedIn();
    const other = new Browser(app);
    await other.signIn(person.email, PASSWORD);
    const old = browser.stolen();
    app.clock.advance(11 * 60_000);
    expect((await browser.put('/account/password', { current: PASSWORD, password: NEXT })).status).toBe(204);
    expect((await old.get('/session')).status).toBe(401);
    expect((await other.get('/session')).status).toBe(401);
    expect((await browser.get('/session')).status).toBe(200);
    expect((await browser.post('/account/second-factor')).body.code).toBe('step_up');
    expect((await new Browser(app).signIn(person.email, NEXT)).status).toBe(200);
    const notices = await sql(
      app,
      "SELECT 1 FROM mail_outbox WHERE kind = 'password_changed' AND recipient = $email",
      { email: person.email },
    );
    expect(notices).toHaveLength(1);
  });

  test('R9: a proof does not stretch the twelve hours', async () => {
    const { browser } = await signedIn();
    for (let minutes = 0; minutes < 11 * 60 + 40; minutes += 20) {
      app.clock.advance(20 * 60_000);
      expect((await browser.get('/session')).status).toBe(200);
    }
    expect((await browser.post('/session/proof', { password: PASSWORD })).status).toBe(204);
    app.clock.advance(19 * 60_000);
    expect((await browser.get('/session')).status).toBe(200);
    app.clock.advance(2 * 60_000);
    expect((await browser.get('/session')).status).toBe(401);
  });
});

describe('where one is signed in', () => {
  test('is listed in plain words with this one marked, and without what would sign anybody in', async () => {
    const { person, browser } = await signedIn();
    const phone = new Browser(app, { userAgent: PHONE });
    app.clock.advance(60_000);
    await phone.signIn(person.email, PASSWORD);
    const { items } = (await browser.get('/account/sessions')).body as {
      items: { label: string; current: boolean }[];
    };
    expect(items.map(({ label, current }) => [label, current])).toEqual([
      ['Safari on iPhone', false],
      ['Chromium on Android', true],
    ]);
    const stored = await sql<{ all: string }>(
      app,
      'SELECT sessions::text AS all FROM sessions WHERE person_id = $id',
      { id: person.id },
    );
    for (const { all } of stored) expect(all).not.toContain('Mozilla');
  });

  test('another of one’s own ends at once; somebody else’s is not found and lives on', async () => {
    const { person, browser } = await signedIn();
    const phone = new Browser(app, { userAgent: PHONE });
    await phone.signIn(person.email, PASSWORD);
    const neighbour = await signedIn();
    const idOf = async (one: Browser) =>
      ((await one.get('/account/sessions')).body.items as { id: string; current: boolean }[]).find(
        ({ current }) => current,
      )?.id;
    expect((await browser.delete(`/account/sessions/${await idOf(neighbour.browser)}`)).status).toBe(404);
    expect((await neighbour.browser.get('/session')).status).toBe(200);
    const phones = await idOf(phone);
    expect((await browser.delete(`/account/sessions/${phones}`)).status).toBe(204);
    expect((await phone.get('/session')).status).toBe(401);
    expect((await browser.delete(`/account/sessions/${phones}`)).status).toBe(404);
    expect((await browser.get('/session')).status).toBe(200);
  });

  test.each([
    [TABLET, 'Chromium on Android'],
    [PHONE, 'Safari on iPhone'],
    [
      'Mozilla/5.0 (Windows NT 10.0; Win64; x64; rv:127.0) Gecko/20100101 Firefox/127.0',
      'Firefox on Windows',
    ],
    [
      'Mozilla/5.0 (X11; Linux x86_64) AppleWebKit/537.36 (KHTML, like Gecko) Chrome/126.0.0.0 Safari/537.36 Edg/126.0.0.0',
      'Edge on Linux',
    ],
    [undefined, 'A browser on an unknown device'],
    ['x'.repeat(5_000), 'A browser on an unknown device'],
  ])('%s is called %s', (userAgent, label) => {
    expect(deviceLabel(userAgent)).toBe(label);
  });
});
