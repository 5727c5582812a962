import { describe, expect, test } from 'vitest';
import { codeOf } from '../../../server/auth/secondFactor.ts';
import { useApp } from '../../support/app.ts';
import { factories } from '../../support/factories.ts';
import { Browser, codeAt, fromBase32, hotp, setPassword, sql } from './browser.ts';

const app = useApp();
const make = factories(app);
const PASSWORD = 'nine lamps along the quay';
const STEP = 30_000;

async function signedIn() {
  const person = await make.person();
  await setPassword(app, person.id, PASSWORD);
  const browser = new Browser(app);
  expect((await browser.signIn(person.email, PASSWORD)).status).toBe(200);
  return { person, browser };
}

/** Somebody with a second factor; the clock stands one step after the code of the enrolment. */
async function enrolled() {
  const { person, browser } = await signedIn();
  const begun = await browser.post('/account/second-factor');
  expect(begun.status).toBe(200);
  const secret: string = begun.body.secret;
  const done = await browser.put('/account/second-factor', { code: codeAt(secret, app.clock.now()) });
  expect(done.status).toBe(200);
  const recoveryCodes: string[] = done.body.recoveryCodes;
  app.clock.advance(STEP);
  return { person, browser, secret, recoveryCodes };
}

describe('the codes', () => {
  test('are those of RFC 4226 appendix D', () => {
    const key = Buffer.from('12345678901234567890');
    const values = [
      '755224',
      '287082',
      '359152',
      '969429',
      '338314',
      '254676',
      '287922',
      '162583',
      '399871',
      '520489',
    ];
    expect(values.map((_, counter) => codeOf('GEZDGNBVGY3TQOJQGEZDGNBVGY3TQOJQ', counter))).toEqual(values);
    expect(values.map((_, counter) => hotp(key, counter))).toEqual(values);
  });

  test.each([
    [59, '287082'],
    [1_111_111_109, '081804'],
    [1_111_111_111, '050471'],
    [1_234_567_890, '005924'],
    [2_000_000_000, '279037'],
    [20_000_000_000, '353130'],
  ])('at %i s are those of RFC 6238 appendix B, in six digits', (seconds, code) => {
    const secret = 'GEZDGNBVGY3TQOJQGEZDGNBVGY3TQOJQ';
    expect(codeOf(secret, Math.floor(seconds / 30))).toBe(code);
    expect(codeAt(secret, new Date(seconds * 1_000))).toBe(code);
  });
});

describe('R11: setting up', () => {
  test('counts only once a code of it has been given; the secret lies sealed and is shown once', async () => {
    const { person, browser } = await signedIn();
    const begun = await browser.post('/account/second-factor');
    expect(fromBase32(begun.body.secret)).toHaveLength(20);
    expect(begun.body.uri).toMatch(/^otpauth:\/\/totp\/Quayword/);
    expect(begun.body.uri).toContain(begun.body.secret);
    expect((await browser.get('/session')).body.secondFactor.enrolled).toBe(false);
    expect((await new Browser(app).signIn(person.email, PASSWORD)).status).toBe(200);

    const wrong = await browser.put('/account/second-factor', { code: '000000' });
    expect(wrong.status).toBe(422);
    const done = await browser.put('/account/second-factor', {
      code: codeAt(begun.body.secret, app.clock.now()),
    });
    expect(done.status).toBe(200);
    expect((await browser.get('/session')).body.secondFactor.enrolled).toBe(true);
    const [row] = await sql<{ all: string }>(app, 'SELECT people::text AS all FROM people WHERE id = $id', {
      id: person.id,
    });
    expect(row?.all).not.toContain(begun.body.secret);
    expect(row?.all).not.toContain(fromBase32(begun.body.secret).toString('hex'));
    expect(app.logged()).not.toContain(begun.body.secret);
    expect((await browser.post('/account/second-factor')).status).toBe(409);
  });

  test('asks for a fresh proof first (R13), and ends every other session', async () => {
    const { person, browser } = await signedIn();
    const other = new Browser(app);
    await other.signIn(person.email, PASSWORD);
    app.clock.advance(11 * 60_000);
    const stale = await browser.post('/account/second-factor');
    expect([stale.status, stale.body.code]).toEqual([403, 'step_up']);
    expect((await browser.post('/session/proof', { password: PASSWORD })).status).toBe(204);
    const begun = await browser.post('/account/second-factor');
    expect(begun.status).toBe(200);
    expect(
      (await browser.put('/account/second-factor', { code: codeAt(begun.body.secret, app.clock.now()) }))
        .status,
    ).toBe(200);
    expect((await other.get('/session')).status).toBe(401);
    expect((await browser.get('/session')).status).toBe(200);
  });

  test('gives ten recovery codes of at least 112 bits, kept only as hashes', async () => {
    const { person, recoveryCodes } = await enrolled();
    expect(new Set(recoveryCodes).size).toBe(10);
    for (const code of recoveryCodes)
      expect(code.replace(/[^0-9a-f]/g, '').length * 4).toBeGreaterThanOrEqual(112);
    const rows = await sql<{ all: string }>(
      app,
      'SELECT recovery_codes::text AS all FROM recovery_codes WHERE person_id = $id',
      { id: person.id },
    );
    expect(rows).toHaveLength(10);
    for (const code of recoveryCodes) {
      for (const row of rows) expect(row.all).not.toContain(code.replace(/[^0-9a-f]/g, ''));
    }
  });
});

describe('R11: signing in with it', () => {
  test('asks for the code only after the right password, and makes no session before it', async () => {
    const { person, secret } = await enrolled();
    const browser = new Browser(app);
    const wrong = await browser.signIn(person.email, 'not the password', codeAt(secret, app.clock.now()));
    expect([wrong.status, wrong.body.code]).toEqual([401, 'wrong_sign_in']);
    const asked = await browser.signIn(person.email, PASSWORD);
    expect([asked.status, asked.body.code]).toEqual([401, 'code_needed']);
    expect(browser.signedIn).toBe(false);
    expect((await browser.signIn(person.email, PASSWORD, codeAt(secret, app.clock.now()))).status).toBe(200);
    expect((await browser.get('/session')).status).toBe(200);
  });

  test('takes the code of this step and of the one before, no older and none to come', async () => {
    for (const [stepsOff, status] of [
      [-2, 401],
      [1, 401],
      [2, 401],
      [-1, 200],
    ] as const) {
      const { person, secret } = await enrolled();
      app.clock.advance(3 * STEP);
      const answer = await new Browser(app).signIn(
        person.email,
        PASSWORD,
        codeAt(secret, app.clock.now(), stepsOff),
      );
      expect(answer.status, `${stepsOff} steps off`).toBe(status);
    }
  });

  test('takes a code once, also when it comes twenty times at one moment', async () => {
    const { person, secret } = await enrolled();
    const code = codeAt(secret, app.clock.now());
    const answers = await Promise.all(
      Array.from({ length: 20 }, () => new Browser(app).signIn(person.email, PASSWORD, code)),
    );
    expect(answers.filter((answer) => answer.status === 200)).toHaveLength(1);
    app.clock.advance(16 * 60_000);
  });

  test('does not take the step before once a newer code was used', async () => {
    const { person, secret } = await enrolled();
    app.clock.advance(3 * STEP);
    expect(
      (await new Browser(app).signIn(person.email, PASSWORD, codeAt(secret, app.clock.now()))).status,
    ).toBe(200);
    expect(
      (await new Browser(app).signIn(person.email, PASSWORD, codeAt(secret, app.clock.now(), -1))).status,
    ).toBe(401);
  });

  test('stops guesses at the code per account, whichever address they come from', async () => {
    const { person, secret } = await enrolled();
    const statuses: number[] = [];
    for (let tries = 0; tries < 10; tries += 1) {
      const browser = new Browser(app, { address: `127.0.20.${tries + 1}` });
      const answer = await browser.signIn(person.email, PASSWORD, String(100_000 + tries));
      statuses.push(answer.status);
    }
    expect(statuses.at(-1)).toBe(429);
    expect(statuses.filter((status) => status === 401).length).toBeLessThanOrEqual(6);
    expect(
      (await new Browser(app).signIn(person.email, PASSWORD, codeAt(secret, app.clock.now()))).status,
    ).toBe(429);
    app.clock.advance(16 * 60_000);
    expect(
      (await new Browser(app).signIn(person.email, PASSWORD, codeAt(secret, app.clock.now()))).status,
    ).toBe(200);
  });

  test('takes each recovery code once', async () => {
    const { person, recoveryCodes } = await enrolled();
    const [first = '', second = ''] = recoveryCodes;
    expect((await new Browser(app).signIn(person.email, PASSWORD, first)).status).toBe(200);
    expect((await new Browser(app).signIn(person.email, PASSWORD, first)).status).toBe(401);
    const shouted = second.toUpperCase().replace(/-/g, ' ');
    expect((await new Browser(app).signIn(person.email, PASSWORD, shouted)).status).toBe(200);
  });

  test('somebody else’s code and recovery code open nothing', async () => {
    const [one, other] = [await enrolled(), await enrolled()];
    const { person } = one;
    expect(
      (await new Browser(app).signIn(person.email, PASSWORD, codeAt(other.secret, app.clock.now()))).status,
    ).toBe(401);
    expect((await new Browser(app).signIn(person.email, PASSWORD, other.recoveryCodes[0])).status).toBe(401);
    expect((await new Browser(app).signIn(person.email, PASSWORD, one.recoveryCodes[0])).status).toBe(200);
  });

  test('R12: a role that asks for it reaches nothing of the vessel without', async () => {
    const vesselId = await make.vessel();
    await sql(app, "UPDATE vessels SET second_factor_roles = '{captain}' WHERE id = $id", { id: vesselId });
    const { person, browser, secret } = await enrolled();
    await make.member(vesselId, 'captain', { personId: person.id });
    const stew = await signedIn();
    await make.member(vesselId, 'chief_stew', { personId: stew.person.id });
    const captain = await signedIn();
    await make.member(vesselId, 'captain', { personId: captain.person.id });

    expect((await stew.browser.get(`/vessels/${vesselId}/members`)).status).toBe(200);
    const refused = await captain.browser.get(`/vessels/${vesselId}/members`);
    expect([refused.status, refused.body.code]).toEqual([403, 'second_factor_needed']);
    expect((await captain.browser.get('/session')).body.secondFactor).toEqual({
      enrolled: false,
      required: true,
    });
    expect((await browser.get(`/vessels/${vesselId}/members`)).status).toBe(200);
    const fresh = new Browser(app);
    await fresh.signIn(person.email, PASSWORD, codeAt(secret, app.clock.now()));
    expect((await fresh.get(`/vessels/${vesselId}/members`)).status).toBe(200);
  });
});

describe('R11: taking it away', () => {
  test('needs password and code; both are asked for', async () => {
    const { person, browser, secret } = await enrolled();
    const code = codeAt(secret, app.clock.now());
    expect(
      (await browser.delete('/account/second-factor', { password: 'not the password', code })).status,
    ).toBe(422);
    expect(
      (await browser.delete('/account/second-factor', { password: PASSWORD, code: '123456' })).status,
    ).toBe(401);
    expect((await browser.delete('/account/second-factor', { password: PASSWORD })).status).toBe(422);
    expect((await browser.get('/session')).body.secondFactor.enrolled).toBe(true);
    expect((await browser.delete('/account/second-factor', { password: PASSWORD, code })).status).toBe(204);
    expect((await new Browser(app).signIn(person.email, PASSWORD)).status).toBe(200);
    expect(await sql(app, 'SELECT 1 FROM recovery_codes WHERE person_id = $id', { id: person.id })).toEqual(
      [],
    );
  });
});

describe('R8, R13: proving again who is there', () => {
  test('asks for password and code, gives the session a new id, and the old id is dead', async () => {
    const { browser, secret } = await enrolled();
    const old = browser.stolen();
    expect((await browser.post('/session/proof', { password: 'not the password' })).status).toBe(422);
    const asked = await browser.post('/session/proof', { password: PASSWORD });
    expect(asked.body.code).toBe('code_needed');
    expect((await old.get('/session')).status).toBe(200);
    expect(
      (await browser.post('/session/proof', { password: PASSWORD, code: codeAt(secret, app.clock.now()) }))
        .status,
    ).toBe(204);
    expect((await old.get('/session')).status).toBe(401);
    const session = await browser.get('/session');
    expect(session.body.provedAt).toBe(app.clock.now().toISOString());
  });

  test('is good for ten minutes on this session only', async () => {
    const { person, browser } = await signedIn();
    const other = new Browser(app);
    await other.signIn(person.email, PASSWORD);
    app.clock.advance(11 * 60_000);
    expect((await browser.post('/session/proof', { password: PASSWORD })).status).toBe(204);
    expect((await other.post('/account/second-factor')).status).toBe(403);
    app.clock.advance(10 * 60_000);
    expect((await browser.post('/account/second-factor')).status).toBe(200);
    app.clock.advance(1_000);
    expect((await browser.post('/account/second-factor')).status).toBe(403);
  });

  test('R3: guesses at sign-in do not keep the signed-in person from it', async () => {
    const { person, browser } = await signedIn();
    for (let tries = 0; tries < 12; tries += 1)
      await new Browser(app, { address: '127.0.21.1' }).signIn(person.email, `guess ${tries}`);
    expect((await new Browser(app).signIn(person.email, PASSWORD)).status).toBe(429);
    expect((await browser.post('/session/proof', { password: PASSWORD })).status).toBe(204);
  });
});
