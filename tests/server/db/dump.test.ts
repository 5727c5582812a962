import { beforeAll, describe, expect, test } from 'vitest';
import { useApp } from '../../support/app.ts';
import { at, boats } from '../../support/boat.ts';
import { factories } from '../../support/factories.ts';
import { disguises, dump, findIn, markers } from '../../support/oracles.ts';
import { Browser, setPassword, sql } from '../auth/browser.ts';

const app = useApp();
const world = boats(app);
const make = factories(app);
const PASSWORD = 'seven harbours in a row';

/** Secrets told to somebody in this file, each to be found nowhere in the database. */
const told: Record<string, string> = {};

beforeAll(async () => {
  const boat = await world.boat();
  told.passphrase = boat.networks.guest.passphrase;
  const person = await make.member(boat.vesselId, 'captain');
  await setPassword(app, person.id, PASSWORD);
  told.password = PASSWORD;
  const browser = new Browser(app);
  expect((await browser.signIn(person.email, PASSWORD)).status).toBe(200);
  const [, payload = ''] = browser.sessionCookie.split('.');
  const { sid } = JSON.parse(Buffer.from(payload, 'base64url').toString()) as { sid: string };
  told.session = sid;
  told.cookie = browser.sessionCookie;
  told.device = browser.knownAs ?? '';
  const enrolment = await browser.post('/account/second-factor');
  told.seed = enrolment.body.secret;
  expect((await browser.post('/password-resets', { email: person.email })).status).toBe(204);
  const invited = await browser.post(`${boat.base}/invitations`, {
    email: 'matelot@crew.example',
    name: 'Renske Oude Vrielink',
    roles: ['purser'],
  });
  expect(invited.status, invited.text).toBe(201);
  await browser.post(`${boat.base}/networks/${boat.networks.guest.id}/cards/print`, {
    guestIds: [at(boat.guests, 0).id],
    format: 'wallet',
  });
});

describe('R25: whoever has a dump of the database has no secret', () => {
  test('there is something of every kind to look for', async () => {
    for (const [what, secret] of Object.entries(told))
      expect([what, secret.length > 15]).toEqual([what, true]);
    const known = await markers(app);
    expect(known).toContain(told.passphrase);
    expect(known).toContain(told.seed);
    // The two mailed tokens lie sealed until they are sent.
    const sealed = await sql<{ kind: string }>(
      app,
      'SELECT kind FROM mail_outbox WHERE sealed IS NOT NULL ORDER BY kind',
    );
    expect(sealed.map(({ kind }) => kind)).toEqual(['invitation', 'password_reset']);
    expect(known.length).toBeGreaterThan(5);
  });

  test.each([
    ['plain, as inserts', ['--inserts']],
    ['plain, as copies', []],
    ['custom, not compressed', ['--format=custom', '--compress=0']],
    ['tar', ['--format=tar']],
  ])('%s', async (_what, format) => {
    const text = await dump(app, ...format);
    // What may be there is found, so the search sees what is there.
    expect(findIn(text, ['Sigrun Brandvold'])).toBe(true);
    for (const [what, secret] of Object.entries(told))
      expect([what, findIn(text, [secret])]).toEqual([what, false]);
    expect(findIn(text, await markers(app))).toBe(false);
  });

  test('no key of the server is in it either', async () => {
    const { config } = app.services;
    const keys = [
      ...config.vaultKeys.keys.values(),
      ...config.sessionKeys.keys.values(),
      config.fingerprintKey,
      config.passwordPepper,
      config.logSigningSeed,
    ];
    const text = await dump(app, '--inserts');
    for (const key of keys)
      expect(
        [key.toString('hex'), key.toString('base64'), key.toString('base64url')].some((form) =>
          text.includes(form),
        ),
      ).toBe(false);
  });

  test('the search knows a secret by every one of its forms', () => {
    const secret = 'otter+plum/copper "lantern"';
    for (const form of disguises(secret)) expect(findIn(`before ${form} after`, [secret])).toBe(true);
    expect(findIn('otter plum copper lantern', [secret])).toBe(false);
  });
});
