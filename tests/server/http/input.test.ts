import { gzipSync } from 'node:zlib';
import { beforeAll, describe, expect, test } from 'vitest';
import { endpoints } from '../../../server/routes.ts';
import { CSV_MAX_BYTES, JSON_MAX_BYTES } from '../../../shared/rules/limits.ts';
import { useApp } from '../../support/app.ts';
import { at, type Boat, boats } from '../../support/boat.ts';
import { factories } from '../../support/factories.ts';
import { contents } from './contents.ts';
import { type Answer, address, ownPage, sessionCookie, wire } from './wire.ts';

const app = useApp();
const make = factories(app);
const net = wire(app);
const all = contents(app);
const world: { boat?: Boat; captain: string } = { captain: '' };
const boat = (): Boat => {
  if (!world.boat) throw new Error('The boat is made before the tests');
  return world.boat;
};

beforeAll(async () => {
  world.boat = await boats(app).boat();
  world.captain = await make.session((await make.member(world.boat.vesselId, 'captain')).id);
});

const sent = (method: string, path: string, body: string | Buffer, more: Record<string, string> = {}) =>
  net.ask(method, `/api${boat().base}${path}`, {
    headers: { ...ownPage(app, world.captain), ...more },
    sessionId: world.captain,
    body,
  });
const read = (path: string) =>
  net.ask('GET', `/api${boat().base}${path}`, { headers: { Cookie: sessionCookie(app, world.captain) } });
const guest = (name: string) => JSON.stringify({ partyId: boat().partyId, name });

/** A refusal that says what is wrong, in time: what takes longest may not keep others waiting. */
async function refused(asking: Promise<Answer>, statuses: readonly number[]): Promise<Answer> {
  const answer = await asking;
  expect(statuses, `${answer.status} ${answer.code}`).toContain(answer.status);
  return answer;
}

const nested = (open: string, close: string, depth: number) => open.repeat(depth) + close.repeat(depth);

describe('R36: JSON of every hostile shape', () => {
  test('is taken up to 256 kB, counted to the byte, inflated or not', async () => {
    const around = Buffer.byteLength(guest(''));
    await refused(sent('POST', '/guests', guest('m'.repeat(JSON_MAX_BYTES - around))), [422]);
    await refused(sent('POST', '/guests', guest('m'.repeat(JSON_MAX_BYTES - around + 1))), [413]);
    const bomb = gzipSync(guest('m'.repeat(50 * 1024 * 1024)));
    expect(bomb.length).toBeLessThan(JSON_MAX_BYTES);
    await refused(sent('POST', '/guests', bomb, { 'Content-Encoding': 'gzip' }), [413]);
  });

  test('is taken up to a list of 2 MB where a list is sent, and nowhere else', async () => {
    const list = (bytes: number) =>
      JSON.stringify({ base64: Buffer.alloc(bytes, 'Anna\n').toString('base64') });
    const previewed = await sent('POST', '/arrivals/preview', list(CSV_MAX_BYTES));
    expect(previewed.status).not.toBe(413);
    await refused(sent('POST', '/arrivals/preview', list(CSV_MAX_BYTES + 4096)), [413]);
    const large = endpoints.filter(({ contract }) => contract.bodyMax !== undefined);
    expect(large.map(({ contract }) => contract.name).sort()).toEqual([
      'arrivals.import',
      'arrivals.preview',
    ]);
    for (const { contract } of endpoints) {
      if (contract.method === 'GET' || contract.bodyMax !== undefined) continue;
      const answer = await net.ask(contract.method, address(contract, { vesselId: boat().vesselId }), {
        headers: ownPage(app, world.captain),
        body: JSON.stringify({ text: 'm'.repeat(JSON_MAX_BYTES) }),
      });
      expect(answer.status, contract.name).toBe(413);
    }
  });

  test.each([
    ['a thousand lists in each other', nested('[', ']', 1000)],
    ['a thousand objects in each other', `${'{"a":'.repeat(1000)}1${'}'.repeat(1000)}`],
    ['a hundred thousand lists in each other', nested('[', ']', 100_000)],
    ['twenty thousand fields', `{${Array.from({ length: 20_000 }, (_, at) => `"f${at}":1`).join(',')}}`],
    ['no JSON', '{"name":'],
    ['text alone', '"Anna"'],
    ['nothing but null', 'null'],
    ['a number that is none', '{"name":NaN}'],
    ['overlong UTF-8 in its place', Buffer.from('7b226e616d65223a22c0ae227d', 'hex')],
  ])('%s', async (_name, body) => {
    const began = performance.now();
    await refused(sent('POST', '/guests', body), [400, 413, 422]);
    expect(performance.now() - began).toBeLessThan(2000);
  });

  test.each([
    ['__proto__', '{"__proto__":{"admin":true},"name":"Anna"}'],
    [
      '__proto__ in a row',
      '{"newParty":{"name":"m","arrivesAt":"2026-07-01T00:00:00Z","leavesAt":"2026-07-02T00:00:00Z"},"rows":[{"name":"Anna","__proto__":{"under16":true}}]}',
    ],
    ['constructor', '{"constructor":{"prototype":{"admin":true}},"name":"Anna"}'],
  ])('%s makes nobody more than they were', async (_name, body) => {
    const path = body.includes('rows') ? '/arrivals/import' : '/guests';
    await refused(sent('POST', path, body), [422]);
    expect(({} as { admin?: boolean }).admin).toBeUndefined();
  });

  test('the same field twice counts once, as the last (RFC 8259 section 4 leaves it open)', async () => {
    const body = `{"partyId":"${boat().partyId}","name":"First of two","name":"Last of two"}`;
    const answer = await refused(sent('POST', '/guests', body), [201]);
    expect(answer.text).toContain('Last of two');
    const names = await all.asOwner<{ name: string }>("SELECT name FROM guests WHERE name LIKE '% of two'");
    expect(names).toEqual([{ name: 'Last of two' }]);
  });

  test.each([
    ['a list where a text belongs', { name: ['Anna'] }],
    ['an object where a text belongs', { name: { $ne: '' } }],
    ['a figure where a text belongs', { name: 7 }],
    ['a huge figure', { under16: 1e308 }],
    ['the zero character', { name: 'Anna\0Brandt' }],
    ['half a letter', { name: 'Anna \ud83d' }],
    ['a year nobody keeps', { fromAt: '0000-01-01T00:00:00Z' }],
    ['a day that is none', { fromAt: '2026-02-30T00:00:00Z' }],
    ['an identifier with more after it', { cabinId: `${'0'.repeat(8)}-0000-4000-8000-000000000000' OR 1=1` }],
  ])('%s', async (_name, more) => {
    const before = await all.now();
    const answer = await refused(
      sent('POST', '/guests', JSON.stringify({ partyId: boat().partyId, name: 'Anna', ...more })),
      [422],
    );
    expect(Object.keys((JSON.parse(answer.text) as { errors: object }).errors)).toEqual(Object.keys(more));
    expect(await all.now()).toEqual(before);
  });
});

describe('R36: queries of every hostile shape', () => {
  test.each([
    'limit=-1',
    'limit=0',
    'limit=101',
    'limit=1000000000',
    'limit=abc',
    'limit=5.5',
    'limit=',
    'limit=Infinity',
    'limit=5&limit=6',
    'limit[]=5',
    'limit[$gt]=5',
    'offset=1000000000000',
    'sort=password',
    'order[]=name',
    'after=m',
    'after=bnVsbA.m',
    `after=${'m'.repeat(399)}.${'m'.repeat(22)}`,
    'after=a&after=b',
    'after=%00',
    'state=printed&state=void',
    'state=everything',
    'networkId=1',
    'networkId=%27%20OR%201%3D1',
    'networkId[]=1',
    'a=1&a=2',
    '__proto__=1',
    '__proto__[limit]=1',
    'constructor=1',
    '%00=1',
    'fields=passphrase',
  ])('%s is refused', async (query) => {
    const answer = await refused(read(`/cards?${query}`), [400, 422]);
    expect(answer.code === 'malformed' || answer.code === 'invalid').toBe(true);
  });

  test('a cursor is of one list, one vessel and our own hand', async () => {
    const { vesselId, networks } = boat();
    for (let made = 0; made < 3; made++)
      await sent('POST', `/networks/${networks.guest.id}/cards/print`, '{"blanks":2,"format":"wallet"}');
    const first = JSON.parse((await read('/cards?limit=2')).text) as { after: string };
    expect((await read(`/cards?limit=2&after=${first.after}`)).status).toBe(200);
    const [text = '', signed = ''] = first.after.split('.');
    const forged = Buffer.from(Buffer.from(text, 'base64url').toString().replace('2026', '2025')).toString(
      'base64url',
    );
    for (const cursor of [`${forged}.${signed}`, `${text}.${signed.slice(0, -1)}m`, text, `.${signed}`])
      await refused(read(`/cards?after=${cursor}`), [400]);
    await refused(read(`/log?after=${first.after}`), [400]);
    const other = await boats(app).boat({ name: 'Corvina' });
    const theirs = await make.session((await make.member(other.vesselId, 'captain')).id);
    const elsewhere = await net.ask('GET', `/api${other.base}/cards?after=${first.after}`, {
      headers: { Cookie: sessionCookie(app, theirs) },
    });
    expect([elsewhere.status, other.vesselId === vesselId]).toEqual([400, false]);
  });

  test('fifty thousand characters at every pattern are refused in time', async () => {
    const long = (text: string) => text.repeat(Math.ceil(50_000 / text.length)).slice(0, 50_000);
    const began = performance.now();
    for (const text of ['a@', 'a.a-', '0000-', '2026-01-01T00:00:00.', 'A', '%41', ' '].map(long)) {
      await refused(
        sent('POST', '/guests', JSON.stringify({ partyId: text, name: text, fromAt: text })),
        [422],
      );
      await refused(sent('POST', '/invitations', JSON.stringify({ email: text, roles: [text] })), [422]);
      await refused(sent('POST', '/arrivals/preview', JSON.stringify({ base64: `${text}!` })), [422]);
      await refused(read(`/cards?after=${encodeURIComponent(text).slice(0, 12_000)}`), [422]);
    }
    expect(performance.now() - began).toBeLessThan(10_000);
  });
});

describe('R17: nobody gives themselves more by a field the form does not have', () => {
  const COLUMNS = [
    'id',
    'vesselId',
    'vessel_id',
    'partyId',
    'personId',
    'role',
    'roles',
    'status',
    'suspended',
    'email',
    'mfa',
    'createdBy',
    'createdAt',
    'updated_at',
    'live',
    'liveAt',
    'generation',
    'hash',
    'passphrase',
    'password_hash',
    'erasedAt',
    'ashoreAt',
    'demo',
    'constructor',
    '__proto__',
  ];
  const patches = endpoints.filter(({ contract }) => contract.method === 'PATCH');

  test.each(patches.map(({ contract }) => [contract.name, contract] as const))(
    '%s',
    async (_name, contract) => {
      const before = await all.now();
      const shape = (contract.body as { shape: Record<string, unknown> }).shape;
      const { vesselId, networks, guests, partyId, crewMemberId } = boat();
      const path = address(contract, {
        vesselId,
        networkId: networks.guest.id,
        guestId: at(guests, 0).id,
        partyId,
        crewMemberId,
      });
      for (const column of COLUMNS) {
        if (Object.hasOwn(shape, column)) continue;
        const answer = await net.ask('PATCH', path, {
          headers: ownPage(app, world.captain),
          body: `{"${column}":"captain"}`,
        });
        expect([answer.status, column]).toEqual([422, column]);
        expect(answer.text).toContain(`"${column}":["`);
      }
      expect(await all.now()).toEqual(before);
    },
  );
});
