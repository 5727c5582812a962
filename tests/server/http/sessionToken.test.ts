import { createHmac, generateKeyPairSync, randomBytes } from 'node:crypto';
import jwt from 'jsonwebtoken';
import { beforeAll, describe, expect, test } from 'vitest';
import { SESSION_COOKIE } from '../../../server/http/session.ts';
import { useApp } from '../../support/app.ts';
import { factories } from '../../support/factories.ts';
import { wire } from './wire.ts';

const app = useApp();
const make = factories(app);
const net = wire(app);
const world = { sessionId: '' };

beforeAll(async () => {
  const vesselId = await make.vessel();
  world.sessionId = await make.session((await make.member(vesselId, 'captain')).id);
});

const key = () => app.services.config.sessionKeys.keys.get('s1') ?? Buffer.alloc(0);
const coded = (value: unknown) => Buffer.from(JSON.stringify(value)).toString('base64url');
const HEADER = { alg: 'HS256', typ: 'JWT', kid: 's1' };
const seconds = () => Math.floor(Date.now() / 1000);
const claims = (more: object = {}) => ({
  sid: world.sessionId,
  aud: 'quayword-session',
  iat: seconds(),
  exp: seconds() + 3600,
  ...more,
});

/** A token put together by hand, signed with HMAC of any key and hash. */
function token(
  header: object,
  payload: object | string,
  secret: Buffer | string = key(),
  hash = 'sha256',
): string {
  const text = `${coded(header)}.${typeof payload === 'string' ? payload : coded(payload)}`;
  return `${text}.${createHmac(hash, secret).update(text).digest('base64url')}`;
}

const presented = (value: string) =>
  net.ask('GET', '/api/session', { headers: { Cookie: `${SESSION_COOKIE}=${value}` } });

const pair = generateKeyPairSync('rsa', { modulusLength: 2048 });
const publicPem = pair.publicKey.export({ type: 'spki', format: 'pem' }).toString();

/** Each builds a token that must be worth nothing (RFC 8725, JSON Web Token best current practices). */
const FORGED: Record<string, () => string> = {
  'alg none (RFC 8725 2.1)': () => `${coded({ ...HEADER, alg: 'none' })}.${coded(claims())}.`,
  'alg None in other letters': () => `${coded({ ...HEADER, alg: 'nOnE' })}.${coded(claims())}.`,
  'alg none with a signature': () => token({ ...HEADER, alg: 'none' }, claims()),
  'another algorithm with the right key (RFC 8725 3.1)': () =>
    token({ ...HEADER, alg: 'HS512' }, claims(), key(), 'sha512'),
  'RS256 of a key of their own': () =>
    jwt.sign(claims(), pair.privateKey, { algorithm: 'RS256', keyid: 's1' }),
  'HS256 keyed with a public key (RFC 8725 2.1)': () => token(HEADER, claims(), publicPem),
  'no key id': () => token({ alg: 'HS256', typ: 'JWT' }, claims()),
  'a key id nobody has': () => token({ ...HEADER, kid: 'other' }, claims()),
  'a key id that climbs': () => token({ ...HEADER, kid: '../../../../dev/null' }, claims(), ''),
  'a key id that asks the database': () =>
    token({ ...HEADER, kid: "s1' UNION SELECT 'k" }, claims(), Buffer.from('k')),
  'a key id of every object': () => token({ ...HEADER, kid: 'constructor' }, claims(), 'constructor'),
  'a key id that is no text': () => token({ ...HEADER, kid: ['s1'] }, claims()),
  'a key brought along (jwk)': () =>
    token(
      { alg: 'HS256', typ: 'JWT', jwk: { kty: 'oct', k: Buffer.from('mine').toString('base64url') } },
      claims(),
      'mine',
    ),
  'a key to be fetched (jku, x5u)': () =>
    token(
      { ...HEADER, kid: 'far', jku: 'http://127.0.0.1:9/keys', x5u: 'http://127.0.0.1:9/x' },
      claims(),
      'mine',
    ),
  'another type (RFC 8725 3.11)': () => token({ ...HEADER, typ: 'at+jwt' }, claims()),
  'no type': () => token({ alg: 'HS256', kid: 's1' }, claims()),
  'an end that is past': () => token(HEADER, claims({ exp: seconds() - 3600 })),
  'a beginning that is to come': () => token(HEADER, claims({ nbf: seconds() + 3600 })),
  'another audience (RFC 8725 3.9)': () => token(HEADER, claims({ aud: 'quayword-relay' })),
  'no audience': () => token(HEADER, claims({ aud: undefined })),
  'a session that is no text': () => token(HEADER, claims({ sid: { $ne: '' } })),
  'a key of our length': () => token(HEADER, claims(), randomBytes(32)),
  'an empty signature': () => token(HEADER, claims()).replace(/[^.]*$/, ''),
  'no signature at all': () => token(HEADER, claims()).replace(/\.[^.]*$/, ''),
  'a signature cut short': () => token(HEADER, claims()).slice(0, -4),
  'a signature of one letter': () => token(HEADER, claims()).replace(/\.[^.]*$/, '.A'),
  'claims changed under the signature': () => {
    const [head, , signature] = token(HEADER, claims()).split('.');
    return `${head}.${coded(claims({ sid: 'somebody-else' }))}.${signature}`;
  },
  'claims that are no object': () => token(HEADER, Buffer.from('"text"').toString('base64url')),
  'claims that are no JSON': () => token(HEADER, Buffer.from('{').toString('base64url')),
  'a session nobody has': () => token(HEADER, claims({ sid: 'planted-by-somebody' })),
  'nothing but dots': () => '..',
  'no token': () => 'signed-in',
  'twelve thousand letters': () => token(HEADER, claims({ more: 'm'.repeat(12_000) })),
};

describe('R10: the session’s token', () => {
  test('is taken when it is ours', async () => {
    const made = token(HEADER, claims());
    expect((await presented(made)).status).toBe(200);
  });

  test.each(Object.entries(FORGED))('is worth nothing with %s', async (_name, forge) => {
    const answer = await presented(forge());
    expect(answer.status).toBe(401);
    expect(answer.code).toBe('not_signed_in');
    expect(answer.headers['set-cookie']).toBeUndefined();
  });

  test('of a megabyte ends at the door (RFC 6585 section 5)', async () => {
    const text = await net
      .raw(
        `GET /api/session HTTP/1.1\r\nHost: x\r\nCookie: ${SESSION_COOKIE}=${'m'.repeat(1_000_000)}\r\n\r\n`,
      )
      .catch((error: NodeJS.ErrnoException) => `closed: ${error.code}`);
    // The server may close before all of it was sent.
    expect(text).toMatch(/^(HTTP\/1\.1 431 |closed: (ECONNRESET|EPIPE))/);
  });

  test('given twice counts as the first of them, forged or not', async () => {
    const right = token(HEADER, claims());
    const forged = `${coded({ ...HEADER, alg: 'none' })}.${coded(claims())}.`;
    const both = (one: string, other: string) =>
      net.ask('GET', '/api/session', {
        headers: { Cookie: `${SESSION_COOKIE}=${one}; ${SESSION_COOKIE}=${other}` },
      });
    expect((await both(forged, right)).status).toBe(401);
    expect((await both(right, forged)).status).toBe(200);
  });

  test('leaves nothing of a refused one in the log', () => {
    expect(app.logged()).not.toContain(world.sessionId);
    expect(app.logged()).not.toContain('planted-by-somebody');
  });
});
