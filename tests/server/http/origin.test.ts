import { randomUUID } from 'node:crypto';
import { beforeAll, describe, expect, test } from 'vitest';
import { csrfToken } from '../../../server/http/session.ts';
import { endpoints } from '../../../server/routes.ts';
import { useApp } from '../../support/app.ts';
import { type Boat, boats } from '../../support/boat.ts';
import { factories } from '../../support/factories.ts';
import { contents } from './contents.ts';
import { type Asked, address, ownPage, wire } from './wire.ts';

const app = useApp();
const make = factories(app);
const net = wire(app);
const all = contents(app);
const world: { boat?: Boat; mine: string; other: string } = { mine: '', other: '' };

beforeAll(async () => {
  const dealerId = await make.dealer();
  world.boat = await boats(app).boat();
  const captain = await make.member(world.boat.vesselId, 'captain');
  await app.services.db.transaction({ kind: 'system' }, (tx) =>
    app.services.db.run(
      tx,
      "INSERT INTO dealer_members(id, person_id, dealer_id, role, given_at) VALUES ($id, $person, $dealer, 'service_desk', $now)",
      { id: randomUUID(), person: captain.id, dealer: dealerId, now: app.clock.now() },
    ),
  );
  world.mine = await make.session(captain.id);
  world.other = await make.session(captain.id);
});

function ids(): Record<string, string> {
  const { boat } = world;
  if (!boat) throw new Error('The boat is made before the tests');
  const [guest] = boat.guests;
  return {
    vesselId: boat.vesselId,
    networkId: boat.networks.guest.id,
    guestId: guest?.id ?? '',
    partyId: boat.partyId,
    crewMemberId: boat.crewMemberId,
  };
}

const without = (headers: Record<string, string>, ...names: string[]) =>
  Object.fromEntries(Object.entries(headers).filter(([name]) => !names.includes(name)));

/** Ways a change must not come in; each with how it differs from what our own page sends. */
const FOREIGN: Record<
  string,
  (own: Record<string, string>, signedIn: boolean) => Record<string, string> | null
> = {
  'no token': (own, signedIn) => (signedIn ? without(own, 'X-Quayword-CSRF') : null),
  'a wrong token': (own, signedIn) => (signedIn ? { ...own, 'X-Quayword-CSRF': 'm'.repeat(43) } : null),
  "another session's token": (own, signedIn) =>
    signedIn ? { ...own, 'X-Quayword-CSRF': csrfToken(app.services.config, world.other) } : null,
  'no origin': (own) => without(own, 'Origin'),
  'no origin and no word where from': (own) => without(own, 'Origin', 'Sec-Fetch-Site'),
  'the origin null': (own) => ({ ...own, Origin: 'null' }),
  'another origin': (own) => ({ ...own, Origin: 'https://quayword.example' }),
  'our origin as the beginning of another': (own) => ({ ...own, Origin: `${app.origin}.example` }),
  'our origin by plain HTTP': (own) => ({ ...own, Origin: app.origin.replace('https:', 'http:') }),
  'our origin with another port': (own) => ({ ...own, Origin: `${app.origin}:8443` }),
  'another site': (own) => ({ ...own, 'Sec-Fetch-Site': 'cross-site' }),
  'a sister site': (own) => ({ ...own, 'Sec-Fetch-Site': 'same-site' }),
  'nobody’s page': (own) => ({ ...own, 'Sec-Fetch-Site': 'none' }),
};

/** Bodies that a form of somebody else's page can send (WHATWG Fetch, CORS-safelisted content types). */
const FORMS: Record<string, string> = {
  'text/plain': '{"email":"captain@vessel.example"}',
  'application/x-www-form-urlencoded': 'email=captain%40vessel.example',
  'multipart/form-data; boundary=m':
    '--m\r\nContent-Disposition: form-data; name="email"\r\n\r\nx\r\n--m--\r\n',
  '': '{}',
};

const changes = endpoints.filter(({ contract }) => contract.method !== 'GET');

describe('R31: a change comes from our own page or not at all', () => {
  test.each(changes.map(({ contract }) => [contract.name, contract] as const))(
    '%s',
    async (_name, contract) => {
      const before = await all.now();
      const signedIn = contract.access.kind !== 'anonymous';
      const path = address(contract, ids());
      const own = ownPage(app, signedIn ? world.mine : null);
      const wrong: string[] = [];
      const expectRefused = async (how: string, asked: Asked, statuses: readonly number[]) => {
        const { status, code } = await net.ask(contract.method, path, asked);
        if (!statuses.includes(status)) wrong.push(`${how}: ${status} ${code}`);
      };
      for (const [how, differ] of Object.entries(FOREIGN)) {
        const headers = differ(own, signedIn);
        if (headers) await expectRefused(how, { headers, body: '{}' }, [403]);
      }
      for (const [type, body] of Object.entries(FORMS)) {
        const headers = type === '' ? without(own, 'Content-Type') : { ...own, 'Content-Type': type };
        await expectRefused(`a body of ${type || 'no type'}`, { headers, body }, [415]);
      }
      for (const method of ['GET', 'HEAD', 'TRACE', 'OPTIONS']) {
        const headers = {
          ...own,
          'X-HTTP-Method-Override': contract.method,
          'X-HTTP-Method': contract.method,
        };
        const { status } = await net.ask(method, `${path}?_method=${contract.method}`, { headers });
        if (status >= 500) wrong.push(`${method} in its place: ${status}`);
      }
      expect(wrong).toEqual([]);
      expect(await all.now()).toEqual(before);
    },
  );

  test('signing in from another site opens no session', async () => {
    const body = JSON.stringify({ email: 'captain@vessel.example', password: 'a password of theirs' });
    for (const headers of [
      { ...ownPage(app, null), Origin: 'https://elsewhere.example' },
      { ...ownPage(app, null), 'Sec-Fetch-Site': 'cross-site' },
    ]) {
      const answer = await net.ask('POST', '/api/session', { headers, body });
      expect(answer.status).toBe(403);
      expect(answer.headers['set-cookie']).toBeUndefined();
    }
  });
});

describe('R32: nobody else’s page reads an answer', () => {
  const ORIGINS = [
    'https://elsewhere.example',
    'https://quayword.test.elsewhere.example',
    'https://sub.quayword.test',
    'https://quayword.test:8443',
    'http://quayword.test',
    'null',
  ];

  test.each(ORIGINS)('from %s, asked before or not', async (origin) => {
    const { Cookie = '' } = ownPage(app, world.mine);
    for (const { contract } of endpoints) {
      const path = address(contract, ids());
      const preflight = await net.ask('OPTIONS', path, {
        headers: {
          Origin: origin,
          'Access-Control-Request-Method': contract.method,
          'Access-Control-Request-Headers': 'content-type, x-quayword-csrf',
        },
      });
      const answers = [preflight];
      if (contract.method === 'GET')
        answers.push(await net.ask('GET', `${path}?callback=read`, { headers: { Origin: origin, Cookie } }));
      for (const answer of answers) {
        const shared = Object.keys(answer.headers).filter((name) => name.startsWith('access-control-'));
        expect(shared, `${contract.name}`).toEqual([]);
        expect(answer.headers.vary).toContain('Origin');
        expect(answer.headers['cross-origin-resource-policy']).toBe('same-origin');
        expect(answer.text.startsWith('read(')).toBe(false);
      }
    }
  });
});
