import fc from 'fast-check';
import { beforeAll, describe, expect, test } from 'vitest';
import type { AnyContract } from '../../../server/http/reply.ts';
import { endpoints } from '../../../server/routes.ts';
import { useApp } from '../../support/app.ts';
import { at, type Boat, boats } from '../../support/boat.ts';
import { factories } from '../../support/factories.ts';
import { contents } from './contents.ts';
import { address, NOBODY, ownPage, sessionCookie, wire } from './wire.ts';

const app = useApp();
const make = factories(app);
const net = wire(app);
const all = contents(app);
const world: { boat?: Boat; captain: string; dealer: string } = { captain: '', dealer: '' };

beforeAll(async () => {
  const dealerId = await make.dealer();
  world.boat = await boats(app).boat();
  await boats(app).boat({ name: 'Corvina' });
  world.captain = await make.session((await make.member(world.boat.vesselId, 'captain')).id);
  world.dealer = await make.session((await make.dealerMember(dealerId)).id);
});

/** Inputs of all routes together. */
const INPUTS = 10_000;
const EACH = Math.ceil(INPUTS / endpoints.length);
/** The same inputs every time; another number tries others. */
const SEED = 4180;

/** Texts that have meant something to some database, mapper or parser. */
const MEANINGFUL = [
  "' OR 1=1 --",
  "a')::text; DROP TABLE guests; --",
  'a::text',
  '$1',
  '$vessel',
  ':name',
  ':replacements',
  '%',
  '_',
  '%%',
  '\\',
  '\0',
  'a\0b',
  '\u202e',
  '\ud800',
  '\udfff',
  '😀',
  '1; SELECT pg_sleep(9)',
  '{"$ne":""}',
  '../../etc/passwd',
  '{{7*7}}',
  '<img src=x onerror=alert(1)>',
  '\r\nSet-Cookie: a=b',
  '\u001b[2J',
  '=1+1',
  'null',
  'undefined',
  'NaN',
  'Infinity',
  '-0',
  '1e999',
  '9223372036854775808',
  '0000-01-01T00:00:00Z',
  '9999-12-31T23:59:59.999999999Z',
  '+275760-09-13T00:00:00Z',
  '-000001-01-01T00:00:00Z',
  '2026-06-31T25:61:61Z',
  '2199-12-31T23:59:59Z',
  '1900-01-01T00:00:00Z',
  NOBODY,
  NOBODY.replaceAll('-', ''),
  'Europe/Zagreb',
  'Etc/GMT+12',
  'constructor',
  '__proto__',
  'captain',
  'guest',
  'wpa2',
  'm'.repeat(5000),
];
const NAMES = [
  'id',
  'name',
  'email',
  'password',
  'token',
  'partyId',
  'guestId',
  'networkId',
  'roles',
  'rows',
  'newParty',
  'arrivesAt',
  'leavesAt',
  'dueAt',
  'reason',
  'audience',
  'ssid',
  'security',
  'passphrase',
  'limit',
  'after',
  'from',
  'to',
  'kind',
  'or',
  '$or',
  '[Symbol(or)]',
  'where',
  'order',
  'order[]',
  'group',
  'include',
  "a')::text",
  '__proto__',
  'constructor',
  'toString',
  'length',
  '\0',
  '',
];

const text = fc.oneof(
  { weight: 3, arbitrary: fc.constantFrom(...MEANINGFUL) },
  { weight: 1, arbitrary: fc.string({ unit: 'binary', maxLength: 40 }) },
);
const scalar = fc.oneof(
  { weight: 5, arbitrary: text },
  {
    weight: 1,
    arbitrary: fc.constantFrom<unknown>(
      null,
      true,
      false,
      0,
      -1,
      1,
      0.5,
      1e308,
      2 ** 31,
      2 ** 53,
      -(2 ** 63),
    ),
  },
);
const { any } = fc.letrec<{ any: unknown }>((tie) => ({
  any: fc.oneof(
    { depthSize: 'small', withCrossShrink: true },
    scalar,
    fc.array(tie('any'), { maxLength: 3 }),
    fc.dictionary(fc.constantFrom(...NAMES), tie('any'), { maxKeys: 4, noNullPrototype: true }),
  ),
}));

/** An address can hold no half letters. */
const whole = (one: string) => one.replace(/\p{Surrogate}/gu, '\ufffd');

/** Names of the route's own form, so that what lies behind the first refusal is reached too. */
function ownNames(contract: AnyContract, part: 'body' | 'query'): string[] {
  const schema = contract[part] as { shape?: Record<string, unknown> } | undefined;
  return Object.keys(schema?.shape ?? {});
}

const form = (names: readonly string[], value: fc.Arbitrary<unknown>) =>
  fc.oneof(
    {
      weight: 3,
      arbitrary: fc.dictionary(fc.constantFrom('name', ...names), value, {
        maxKeys: 6,
        noNullPrototype: true,
      }),
    },
    {
      weight: 1,
      arbitrary: fc.dictionary(fc.constantFrom(...NAMES, ...names), value, {
        maxKeys: 6,
        noNullPrototype: true,
      }),
    },
  );

/** A passphrase that is taken must be no name elsewhere, or it would be found there afterwards. */
function apart(body: unknown): unknown {
  if (typeof body !== 'object' || body === null || !('passphrase' in body)) return body;
  return typeof body.passphrase === 'string' ? { ...body, passphrase: `${body.passphrase} typed` } : body;
}

interface Input {
  readonly ids: Record<string, string>;
  readonly query: Record<string, string>;
  readonly body: unknown;
}

function inputs(contract: AnyContract): fc.Arbitrary<Input> {
  const { boat } = world;
  if (!boat) throw new Error('The boat is made before the tests');
  const real: Record<string, string> = {
    vesselId: boat.vesselId,
    networkId: boat.networks.guest.id,
    guestId: at(boat.guests, 0).id,
    partyId: boat.partyId,
    crewMemberId: boat.crewMemberId,
  };
  const places = [...contract.path.matchAll(/:(\w+)/g)].map(([, name = '']) => name);
  const ids = fc.record(
    Object.fromEntries(
      places.map((name) => [
        name,
        fc.oneof(
          { weight: 6, arbitrary: fc.constant(real[name] ?? NOBODY) },
          { weight: 1, arbitrary: text.map((one) => encodeURIComponent(whole(one)) || 'm') },
          { weight: 1, arbitrary: fc.constantFrom('%00', '%ff', '%', '..', '%2e%2e%2f', '%F0%9F') },
        ),
      ]),
    ),
  );
  const query = fc.oneof(
    { weight: 2, arbitrary: fc.constant({}) },
    { weight: 1, arbitrary: form(ownNames(contract, 'query'), text) as fc.Arbitrary<Record<string, string>> },
  );
  const body = fc.oneof(
    { weight: 5, arbitrary: form(ownNames(contract, 'body'), any) as fc.Arbitrary<unknown> },
    { weight: 1, arbitrary: any },
  );
  return fc.record({ ids, query, body: body.map(apart) }) as fc.Arbitrary<Input>;
}

const queryText = (query: Record<string, string>) => {
  const pairs = Object.entries(query).map(
    ([name, value]) => `${encodeURIComponent(whole(name))}=${encodeURIComponent(whole(value))}`,
  );
  return pairs.length > 0 ? `?${pairs.join('&')}` : '';
};

const answered = { inputs: 0, statuses: new Map<number, number>() };

async function ask(
  contract: AnyContract,
  { ids, query, body }: Input,
  session: string | null,
): Promise<void> {
  const safe = contract.method === 'GET';
  const answer = await net.ask(contract.method, `${address(contract, ids)}${queryText(query)}`, {
    headers: safe ? { Cookie: sessionCookie(app, session ?? '') } : ownPage(app, session),
    // Ten thousand answers would be kept until the end.
    recorded: false,
    ...(safe ? {} : { body: JSON.stringify(body) }),
  });
  answered.inputs += 1;
  answered.statuses.set(answer.status, (answered.statuses.get(answer.status) ?? 0) + 1);
  if (answer.status >= 500) throw new Error(`${answer.status} ${answer.code}`);
}

/** These end sessions, so they are asked with one that nobody else needs. */
const ENDS = new Set(['session.signOut', 'account.endAllDevices']);

async function sessionFor(contract: AnyContract): Promise<string | null> {
  if (contract.access.kind === 'anonymous') return null;
  if (ENDS.has(contract.name)) return make.session((await make.person()).id);
  return contract.access.kind === 'dealer' ? world.dealer : world.captain;
}

/** What went wrong at a route, with the smallest input that does it; null when nothing did. */
async function fuzzed(contract: AnyContract): Promise<string | null> {
  const session = await sessionFor(contract);
  const details = await fc.check(
    fc.asyncProperty(inputs(contract), (one) => ask(contract, one, session)),
    { numRuns: EACH, seed: SEED },
  );
  return details.failed ? `${contract.name}: ${fc.stringify(details.counterexample)}` : null;
}

describe('R37: nothing anybody sends is an error of ours', () => {
  test('ten thousand inputs to all routes', async () => {
    const waiting = [...endpoints];
    const wrong: (string | null)[] = [];
    const taking = async () => {
      for (let next = waiting.pop(); next; next = waiting.pop()) wrong.push(await fuzzed(next.contract));
    };
    await Promise.all([taking(), taking(), taking(), taking()]);
    expect(wrong.filter((one) => one !== null)).toEqual([]);
  }, 240_000);

  test('every route was asked, and more than the first refusal was met', async () => {
    expect(answered.inputs).toBeGreaterThanOrEqual(INPUTS);
    console.info('answers of the fuzz:', JSON.stringify(Object.fromEntries(answered.statuses)));
    expect(answered.statuses.get(422)).toBeGreaterThan(1000);
    expect(answered.statuses.get(404)).toBeGreaterThan(100);
    expect(answered.statuses.get(200)).toBeGreaterThan(100);
  });

  test('the other vessel is as she was', async () => {
    const [row] = await all.asOwner<{ guests: number; networks: number }>(
      `SELECT (SELECT count(*)::int FROM guests g WHERE g.vessel_id = v.id) AS guests,
              (SELECT count(*)::int FROM networks n WHERE n.vessel_id = v.id AND n.removed_at IS NULL) AS networks
       FROM vessels v WHERE v.name = 'Corvina'`,
    );
    expect(row).toEqual({ guests: 3, networks: 3 });
  });
});
