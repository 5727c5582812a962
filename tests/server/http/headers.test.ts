import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import os from 'node:os';
import path from 'node:path';
import supertest, { type Response } from 'supertest';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { createApp } from '../../../server/app.ts';
import { useApp } from '../../support/app.ts';
import { at, type Boat, boats } from '../../support/boat.ts';
import { factories } from '../../support/factories.ts';
import { contents } from './contents.ts';
import { ownPage, sessionCookie, wire } from './wire.ts';

const app = useApp();
const make = factories(app);
const net = wire(app);
const all = contents(app);
const world: { boat?: Boat; captain: string } = { captain: '' };
const clientDir = mkdtempSync(path.join(os.tmpdir(), 'quayword-client-'));
afterAll(() => rmSync(clientDir, { recursive: true, force: true }));

beforeAll(async () => {
  world.boat = await boats(app).boat();
  world.captain = await make.session((await make.member(world.boat.vesselId, 'captain')).id);
  mkdirSync(path.join(clientDir, 'assets'));
  writeFileSync(path.join(clientDir, 'index.html'), '<!doctype html><title>Quayword</title>');
  writeFileSync(path.join(clientDir, 'assets', 'index-Dk3x.js'), 'export {};');
  writeFileSync(path.join(clientDir, 'icon.svg'), '<svg xmlns="http://www.w3.org/2000/svg"/>');
});

/** OWASP Secure Headers Project; the policy's directives are those of CSP Level 3. */
function dressed(headers: Record<string, string | string[] | undefined>): void {
  const seconds = Number(/max-age=(\d+)/.exec(String(headers['strict-transport-security']))?.[1]);
  expect(seconds).toBeGreaterThanOrEqual(31_536_000);
  expect(headers['strict-transport-security']).toContain('includeSubDomains');
  expect(headers['x-content-type-options']).toBe('nosniff');
  expect(headers['cross-origin-opener-policy']).toBe('same-origin');
  expect(headers['cross-origin-resource-policy']).toBe('same-origin');
  expect(headers['x-frame-options']).toBe('DENY');
  expect(headers['referrer-policy']).toBe('no-referrer');
  expect(headers['permissions-policy']).toMatch(/camera=\(\).*microphone=\(\).*geolocation=\(\)/);
  const policy = String(headers['content-security-policy']);
  for (const directive of [
    "default-src 'none'",
    "script-src 'self'",
    "object-src 'none'",
    "base-uri 'none'",
    "frame-ancestors 'none'",
    "form-action 'self'",
    "require-trusted-types-for 'script'",
  ])
    expect(policy.split(';')).toContain(directive);
  expect(policy).not.toMatch(/unsafe-|\*|http:/);
  expect(headers['x-powered-by']).toBeUndefined();
  expect(headers.server).toBeUndefined();
  expect(headers.etag).toBeUndefined();
}

/** A problem body of RFC 9457 and nothing else: no stack, version or place in the code. */
function plainProblem(text: string): void {
  const keys = Object.keys(JSON.parse(text) as object).sort();
  expect(keys.filter((key) => key !== 'errors')).toEqual([
    'code',
    'detail',
    'requestId',
    'status',
    'title',
    'type',
  ]);
  expect(text).not.toMatch(/\bat \/|\.ts:|node_modules|sequelize|express|postgres/i);
}

const cookie = () => ({ Cookie: sessionCookie(app, world.captain) });

describe('R34: every answer is dressed', () => {
  test.each([
    ['a read', () => `/api/vessels/${world.boat?.vesselId}/arrivals`, 200],
    ['health', () => '/api/health', 200],
    ['the OpenAPI document', () => '/api/openapi.json', 200],
  ])('%s: JSON in UTF-8, kept nowhere', async (_name, where, status) => {
    const answer = await net.ask('GET', where(), { headers: cookie() });
    expect(answer.status).toBe(status);
    dressed(answer.headers);
    expect(answer.headers['content-type']).toBe('application/json; charset=utf-8');
    expect(answer.headers['cache-control']).toBe('no-store');
  });

  test.each([
    ['nobody signed in', 'GET', '/api/session', {}, 401],
    ['no such address', 'GET', '/api/nothing-here', {}, 404],
    ['no such page', 'GET', '/nothing-here.txt', {}, 404],
    ['another method', 'PUT', '/api/session', {}, 405],
    ['an address that cannot be read', 'GET', '/api/vessels/%E0%A4%A/arrivals', {}, 400],
    ['a path that climbs', 'GET', '/assets/..%2f..%2fpackage.json', {}, 404],
  ])('a refusal: %s', async (_name, method, where, headers, status) => {
    const answer = await net.ask(method, where, { headers });
    expect(answer.status).toBe(status);
    dressed(answer.headers);
    expect(answer.headers['content-type']).toBe('application/problem+json; charset=utf-8');
    plainProblem(answer.text);
  });

  test('an error of our own tells nothing of itself', async () => {
    await all.asOwner('ALTER TABLE cabins RENAME TO cabins_elsewhere');
    try {
      const answer = await net.ask('GET', `/api/vessels/${world.boat?.vesselId}/arrivals`, {
        headers: cookie(),
      });
      expect(answer.status).toBe(500);
      dressed(answer.headers);
      expect(answer.headers['cache-control']).toBe('no-store');
      plainProblem(answer.text);
      expect(answer.text).not.toContain('cabins');
      expect(app.logged()).toContain('"42P01"');
    } finally {
      await all.asOwner('ALTER TABLE cabins_elsewhere RENAME TO cabins');
    }
  });

  test('cards as PDF are a file to keep, not a page to open', async () => {
    const { boat } = world;
    if (!boat) throw new Error('The boat is made before the tests');
    const answer = await net.ask('POST', `/api${boat.base}/networks/${boat.networks.guest.id}/cards/print`, {
      headers: ownPage(app, world.captain),
      sessionId: world.captain,
      body: JSON.stringify({ guestIds: [at(boat.guests, 0).id], format: 'wallet' }),
    });
    expect(answer.status).toBe(200);
    dressed(answer.headers);
    expect(answer.headers['content-type']).toBe('application/pdf');
    expect(answer.headers['content-disposition']).toMatch(/^attachment; filename="[\w. -]+\.pdf"$/);
    expect(answer.headers['cache-control']).toBe('no-store');
    expect(answer.text.startsWith('%PDF-')).toBe(true);
  });

  test.each([
    ['the page', '/vessels/any/networks', 'text/html; charset=utf-8', 'no-store'],
    [
      'a script',
      '/assets/index-Dk3x.js',
      'text/javascript; charset=utf-8',
      /^public, max-age=31536000, immutable$/,
    ],
    ['a picture', '/icon.svg', 'image/svg+xml', 'no-store'],
  ])('the client: %s', async (_name, where, type, kept) => {
    const answer: Response = await supertest(createApp(app.services, { clientDir })).get(where);
    expect(answer.status).toBe(200);
    dressed(answer.headers);
    expect(answer.headers['content-type']).toBe(type);
    expect(answer.headers['cache-control']).toEqual(
      typeof kept === 'string' ? kept : expect.stringMatching(kept),
    );
  });

  test.each(['/assets/none.js', '/assets/..%2f..%2fpackage.json', '/%2e%2e/%2e%2e/package.json', '/.env'])(
    'the client: nothing at %s',
    async (where) => {
      const answer = await supertest(createApp(app.services, { clientDir })).get(where);
      expect(answer.status).toBe(404);
      dressed(answer.headers);
      plainProblem(answer.text);
    },
  );
});

describe('R35: what a request says about itself counts for nothing', () => {
  const FORGED = {
    'X-Forwarded-For': '203.0.113.9',
    'X-Real-IP': '203.0.113.9',
    Forwarded: 'for=203.0.113.9;host=elsewhere.example;proto=https',
    'X-Forwarded-Host': 'elsewhere.example',
    'X-Forwarded-Proto': 'https',
    'X-User-Id': 'captain',
    'X-Vessel-Id': 'any',
    'X-Remote-User': 'captain',
    'X-HTTP-Method-Override': 'DELETE',
    'X-Original-URL': '/api/openapi.json',
    'X-Rewrite-URL': '/api/openapi.json',
  };

  test('no header signs anybody in, changes the method or leads elsewhere', async () => {
    const answer = await net.ask('GET', '/api/session', { headers: FORGED });
    expect([answer.status, answer.code]).toEqual([401, 'not_signed_in']);
    const still = await net.ask('GET', '/api/session', { headers: { ...FORGED, ...cookie() } });
    expect(still.status).toBe(200);
    expect((await net.ask('GET', '/api/session', { headers: cookie() })).status).toBe(200);
  });

  test('failures count for the address they come from, whatever they say', async () => {
    for (const forged of ['203.0.113.9', '203.0.113.10', '2001:db8::1']) {
      const answer = await net.ask('POST', '/api/session', {
        headers: { ...ownPage(app, null), ...FORGED, 'X-Forwarded-For': forged },
        body: JSON.stringify({ email: 'nobody@vessel.example', password: 'not theirs' }),
      });
      expect(answer.status).toBe(401);
    }
    const counted = await all.asOwner<{ key: string; failures: number }>(
      "SELECT key, failures FROM throttles WHERE key LIKE 'address:%'",
    );
    expect(counted).toEqual([{ key: 'address:127.0.0.1', failures: 3 }]);
  });

  test('a link in a mail leads to our own address whatever the Host', async () => {
    const person = await make.person();
    await net.ask('POST', '/api/password-resets', {
      headers: { ...ownPage(app, null), Host: 'elsewhere.example', 'X-Forwarded-Host': 'elsewhere.example' },
      body: JSON.stringify({ email: person.email }),
    });
    const mails = await all.asOwner<{ data: object }>('SELECT data FROM mail_outbox WHERE recipient = $1', [
      person.email,
    ]);
    expect(mails).toHaveLength(1);
    expect(JSON.stringify(mails)).not.toContain('elsewhere');
  });

  test('a whole address in the request line is read as its path (RFC 9112 section 3.2.2)', async () => {
    const text = await net.raw(
      'GET http://elsewhere.example/api/session HTTP/1.1\r\nHost: elsewhere.example\r\nConnection: close\r\n\r\n',
    );
    expect(text).toMatch(/^HTTP\/1\.1 401 /);
    expect(text).not.toContain('elsewhere');
  });

  test.each([
    [
      'both lengths (RFC 9112 section 6.1)',
      'Content-Length: 4\r\nTransfer-Encoding: chunked\r\n',
      '0\r\n\r\nGET /api/health HTTP/1.1\r\nHost: x\r\n\r\n',
    ],
    ['two lengths', 'Content-Length: 4\r\nContent-Length: 5\r\n', '{}\r\n'],
    ['a hidden chunking', 'Transfer-Encoding: xchunked\r\n', '0\r\n\r\n'],
    ['a folded header', 'X-One: a\r\n b: c\r\nContent-Length: x\r\n', ''],
  ])('a request with %s is refused and its connection closed', async (_name, headers, body) => {
    const text = await net.raw(
      `POST /api/session HTTP/1.1\r\nHost: x\r\nContent-Type: application/json\r\n${headers}\r\n${body}`,
    );
    expect(text).toMatch(/^HTTP\/1\.1 400 /);
    expect(text.match(/HTTP\/1\.1/g)).toHaveLength(1);
  });

  test.each(['//elsewhere.example', '/\\elsewhere.example', '/%2f%2felsewhere.example', '/api//session'])(
    'nothing leads from %s to anywhere',
    async (where) => {
      const answer = await net.ask('GET', where);
      expect(answer.status === 200 || answer.status === 404).toBe(true);
      expect(answer.headers.location).toBeUndefined();
    },
  );
});
