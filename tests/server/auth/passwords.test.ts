import argon2 from 'argon2';
import { describe, expect, test } from 'vitest';
import { hashPassword, passwordMatches } from '../../../server/auth/passwords.ts';
import { AppError } from '../../../server/errors.ts';
import { useApp } from '../../support/app.ts';
import { factories } from '../../support/factories.ts';
import { Browser, setPassword, sql } from './browser.ts';

const app = useApp();
const make = factories(app);
const PASSWORD = 'copper kettle on deck';

const storedHash = async (personId: string) =>
  (
    await sql<{ password_hash: string }>(app, 'SELECT password_hash FROM people WHERE id = $id', {
      id: personId,
    })
  )[0]?.password_hash ?? '';

/** The parameters of a stored hash by name, whatever their order (checks 12.2). */
function parameters(hash: string) {
  const [, kind, version, given = '', salt = '', tag = ''] = hash.split('$');
  const named = Object.fromEntries(given.split(',').map((part) => part.split('=')));
  return {
    kind,
    version,
    m: Number(named.m),
    t: Number(named.t),
    p: Number(named.p),
    salt: Buffer.from(salt, 'base64'),
    tag: Buffer.from(tag, 'base64'),
  };
}

describe('the library', () => {
  test.each([
    [argon2.argon2d, '512b391b6f1162975371d30919734294f868e3be3984f3c1a13a4db9fabe4acb'],
    [argon2.argon2i, 'c814d9d1dc7f37aa13f0d77f2494bda1c8de6b016dd388d29952a4c4672b6ce8'],
    [argon2.argon2id, '0d640df58d78766c08c037a34a8b53c9d01ef0452d75b65eb52520e96b01e659'],
  ] as const)('gives the tag of RFC 9106 section 5 for type %i', async (type, tag) => {
    const raw = await argon2.hash(Buffer.alloc(32, 1), {
      type,
      salt: Buffer.alloc(16, 2),
      secret: Buffer.alloc(8, 3),
      associatedData: Buffer.alloc(12, 4),
      timeCost: 3,
      memoryCost: 32,
      parallelism: 4,
      hashLength: 32,
      version: 0x13,
      raw: true,
    });
    expect(raw.toString('hex')).toBe(tag);
  });
});

describe('R1: a stored password', () => {
  test('is argon2id with at least 19456 KiB and two passes, a salt of 16 octets and a tag of 32 of its own', async () => {
    const [one, other] = await Promise.all([
      hashPassword(app.services.config, PASSWORD),
      hashPassword(app.services.config, PASSWORD),
    ]);
    const first = parameters(one ?? '');
    expect(first).toMatchObject({ kind: 'argon2id', version: 'v=19', p: 1 });
    expect(first.m >= 47_104 ? first.t >= 1 : first.m >= 19_456 && first.t >= 2).toBe(true);
    expect(first.salt).toHaveLength(16);
    expect(first.tag).toHaveLength(32);
    expect(first.salt.equals(parameters(other ?? '').salt)).toBe(false);
  });

  test('is worth nothing without the pepper that lies outside the database', async () => {
    const hash = await hashPassword(app.services.config, PASSWORD);
    expect(await passwordMatches(app.services.config, hash, PASSWORD)).toBe(true);
    expect(await argon2.verify(hash, PASSWORD)).toBe(false);
    const other = { ...app.services.config, passwordPepper: Buffer.alloc(32, 7) };
    expect(await passwordMatches(other, hash, PASSWORD)).toBe(false);
  });

  test('is hashed anew at sign-in when it was made with weaker parameters, and left alone otherwise', async () => {
    const person = await make.person();
    const weak = await argon2.hash(PASSWORD, {
      type: argon2.argon2id,
      memoryCost: 8_192,
      timeCost: 2,
      parallelism: 1,
      secret: app.services.config.passwordPepper,
    });
    await sql(app, 'UPDATE people SET password_hash = $weak WHERE id = $id', { weak, id: person.id });
    expect((await new Browser(app).signIn(person.email, `${PASSWORD}!`)).status).toBe(401);
    expect(await storedHash(person.id)).toBe(weak);
    expect((await new Browser(app).signIn(person.email, PASSWORD)).status).toBe(200);
    const renewed = await storedHash(person.id);
    expect(parameters(renewed).m).toBeGreaterThanOrEqual(19_456);
    expect((await new Browser(app).signIn(person.email, PASSWORD)).status).toBe(200);
    expect(await storedHash(person.id)).toBe(renewed);
  });

  test('never waits in an endless line: beyond it people are asked to come back, and memory stays bounded', async () => {
    const before = process.memoryUsage().rss;
    let highest = before;
    const watch = setInterval(() => {
      highest = Math.max(highest, process.memoryUsage().rss);
    }, 5);
    const all = await Promise.allSettled(
      Array.from({ length: 80 }, () => hashPassword(app.services.config, PASSWORD)),
    );
    clearInterval(watch);
    const refused = all.filter((one) => one.status === 'rejected');
    expect(refused.length).toBeGreaterThan(0);
    expect(all.length - refused.length).toBeGreaterThanOrEqual(50);
    for (const one of refused) {
      expect(one.reason).toBeInstanceOf(AppError);
      expect(one.reason).toMatchObject({ status: 503 });
      expect(one.reason.retryAfter).toBeGreaterThan(0);
    }
    // Eighty at once would take 80 × 19 MiB = 1.5 GB; four at a time take 76 MiB.
    expect(highest - before).toBeLessThan(400 * 1024 * 1024);
    // And the line moves on afterwards.
    expect(await hashPassword(app.services.config, PASSWORD)).toMatch(/^\$argon2id\$/);
  });
});

describe('R2: a new password', () => {
  const NAME = 'Wilhelmina Oosterhuis';
  async function signedIn() {
    const vesselId = await make.vessel({ name: 'Sea Lavender' });
    const person = await make.member(vesselId, 'purser', { name: NAME });
    await setPassword(app, person.id, PASSWORD);
    const browser = new Browser(app);
    await browser.signIn(person.email, PASSWORD);
    return { browser, person };
  }

  test.each([
    ['8 characters', 'qz7 mfwt'],
    ['64 characters', 'wq '.repeat(22).slice(0, 64)],
    ['128 characters', 'tide-'.repeat(26).slice(0, 128)],
    ['emoji', 'ferry 🛥️ lamp 🐚 quiet'],
    ['a space at both ends', '  two spaces here  '],
  ])('is taken to the octet with %s', async (_what, password) => {
    const { browser, person } = await signedIn();
    const changed = await browser.put('/account/password', { current: PASSWORD, password });
    expect(changed.status).toBe(204);
    expect((await new Browser(app).signIn(person.email, password.trim())).status).toBe(
      password.trim() === password ? 200 : 401,
    );
    expect((await new Browser(app).signIn(person.email, password)).status).toBe(200);
  });

  test('is refused with a sentence of its own for each fault, and the old one stays', async () => {
    const { browser, person } = await signedIn();
    const { hash } = { hash: await storedHash(person.id) };
    const refused: [string, string][] = [
      ['7 characters', 'qz7 mfw'],
      ['129 characters', 'x'.repeat(129)],
      ['a zero character', 'quiet\0harbour'],
      ['the commonest', 'password'],
      ['a common one, shouted', 'SUNSHINE'],
      ['the own name', NAME],
      ['the own name joined, with a year', 'wilhelminaoosterhuis2026'],
      ['the address', person.email],
      ['the vessel', 'Sea Lavender'],
      ['the vessel with a figure', 'sealavender1'],
    ];
    for (const [what, password] of refused) {
      const answer = await browser.put('/account/password', { current: PASSWORD, password });
      expect(answer.status, what).toBe(422);
      expect(answer.body.errors.password?.[0], what).toMatch(/\w{3}/);
    }
    expect(await storedHash(person.id)).toBe(hash);
  });

  test('needs the one of today', async () => {
    const { browser, person } = await signedIn();
    const hash = await storedHash(person.id);
    const answer = await browser.put('/account/password', {
      current: 'not this one',
      password: 'gulls over the mole',
    });
    expect(answer.status).toBe(422);
    expect(answer.body.errors.current).toBeDefined();
    expect(await storedHash(person.id)).toBe(hash);
  });
});
