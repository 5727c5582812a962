import { randomUUID } from 'node:crypto';
import { beforeAll, describe, expect, test } from 'vitest';
import type { AnyContract } from '../../server/http/reply.ts';
import { endpoints } from '../../server/routes.ts';
import {
  AUDIENCES,
  type Audience,
  DEALER_PERMISSIONS,
  may,
  VESSEL_PERMISSIONS,
  VESSEL_ROLES,
  type VesselAction,
  type VesselRole,
} from '../../shared/rules/permissions.ts';
import { useApp } from '../support/app.ts';
import { anonymousClient, Client } from '../support/client.ts';
import { factories } from '../support/factories.ts';

const app = useApp();
const make = factories(app);

type Principal = 'anonymous' | 'no role' | 'dealer' | VesselRole;
const PRINCIPALS: readonly Principal[] = ['anonymous', 'no role', 'dealer', ...VESSEL_ROLES];
type Place = 'own' | 'foreign' | 'suspended';
const PLACES: readonly Place[] = ['own', 'foreign', 'suspended'];

interface World {
  own: string;
  foreign: string;
  networks: Record<Audience, string>;
  people: Record<string, string>;
  suspended: Record<string, string>;
}
const world: Partial<World> = {};
const the = (): World => world as World;

beforeAll(async () => {
  const dealer = await make.dealer('Halden & Roe');
  const other = await make.dealer('Vermeulen Yacht Systems');
  const own = await make.vessel({ name: 'Tamarisk', dealerId: dealer });
  const foreign = await make.vessel({ name: 'Corvina', dealerId: other });
  const networks = {} as Record<Audience, string>;
  for (const audience of AUDIENCES) {
    networks[audience] = (
      await make.network(own, {
        audience,
        ssid: `Tamarisk ${audience}`,
        live: `marker-for-${audience}-in-force`,
      })
    ).id;
    await make.network(foreign, {
      audience,
      ssid: `Corvina ${audience}`,
      live: `marker-foreign-${audience}-secret`,
    });
  }
  const people: Record<string, string> = {
    'no role': (await make.person()).id,
    dealer: (await make.dealerMember(dealer)).id,
  };
  const suspended: Record<string, string> = {};
  for (const role of VESSEL_ROLES) {
    people[role] = (await make.member(own, role)).id;
    suspended[role] = (await make.member(own, role)).id;
  }
  await app.services.db.transaction({ kind: 'system' }, (tx) =>
    app.services.db.run(
      tx,
      'UPDATE memberships SET suspended_at = $now WHERE person_id = ANY($ids::uuid[])',
      {
        now: app.clock.now(),
        ids: Object.values(suspended),
      },
    ),
  );
  // Somebody always has to be captain, or ending the captain's role would be refused for another reason.
  await make.member(own, 'captain');
  Object.assign(world, { own, foreign, networks, people, suspended } satisfies World);
});

async function clientFor(principal: Principal, place: Place): Promise<Client> {
  if (principal === 'anonymous') return anonymousClient(app);
  const { people, suspended } = the();
  const person = (place === 'suspended' ? suspended[principal] : undefined) ?? people[principal];
  if (!person) throw new Error(`no person for ${principal}`);
  return new Client(app, await make.session(person));
}

function address(contract: AnyContract, vesselId: string, audience: Audience | null): string {
  return contract.path.replace(/:(\w+)/g, (_all: string, name: string) => {
    if (name === 'vesselId') return vesselId;
    if (name === 'networkId' && audience) return the().networks[audience];
    return randomUUID();
  });
}

function ask(client: Client, contract: AnyContract, path: string) {
  switch (contract.method) {
    case 'GET':
      return client.get(path);
    case 'POST':
      return client.post(path, {});
    case 'PUT':
      return client.put(path, {});
    case 'PATCH':
      return client.patch(path, {});
    default:
      return client.delete(path);
  }
}

type Expected = 'passes' | 'not signed in' | 'forbidden' | 'not found';

function expected(
  contract: AnyContract,
  principal: Principal,
  place: Place,
  audience: Audience | null,
): Expected {
  const { access } = contract;
  if (access.kind === 'anonymous') return 'passes';
  if (principal === 'anonymous') return 'not signed in';
  if (access.kind === 'person') return 'passes';
  if (access.kind === 'dealer') {
    if (principal !== 'dealer') return 'not found';
    const roles: readonly string[] =
      DEALER_PERMISSIONS[access.action as keyof typeof DEALER_PERMISSIONS].roles;
    return roles.includes('service_desk') ? 'passes' : 'forbidden';
  }
  if (place !== 'own' || principal === 'dealer' || principal === 'no role') return 'not found';
  const actions: readonly VesselAction[] = access.actions;
  const exact = audience ? actions.filter((action) => action.endsWith(`.${audience}`)) : [];
  const counted = exact.length > 0 ? exact : actions;
  return counted.some((action) => may([principal], action)) ? 'passes' : 'forbidden';
}

/** What a call met, told from its answer and from the guard's own line in the log. */
function met(status: number, code: string | undefined, denied: boolean): Expected {
  if (status === 401 && code === 'not_signed_in') return 'not signed in';
  if (status === 403 && code === 'forbidden') return 'forbidden';
  if (denied && status === 404) return 'not found';
  return 'passes';
}

const perAudience = (contract: AnyContract): boolean =>
  contract.access.kind === 'vessel' &&
  contract.path.includes(':networkId') &&
  contract.access.actions.some((action: string) =>
    AUDIENCES.some((audience) => action.endsWith(`.${audience}`)),
  );

describe('R7, R14, R15: every route × every role × own, foreign and suspended vessel, against the permission table', () => {
  let cells = 0;

  test.each(endpoints.map((one) => [one.contract.name, one.contract] as const))(
    '%s',
    async (_name, contract) => {
      const wrong: string[] = [];
      const places = contract.access.kind === 'vessel' ? PLACES : (['own'] as const);
      for (const place of places) {
        for (const audience of perAudience(contract) && place === 'own' ? AUDIENCES : [null]) {
          for (const principal of PRINCIPALS) {
            const client = await clientFor(principal, place);
            const vesselId = place === 'foreign' ? the().foreign : the().own;
            const before = app.logged().length;
            const answer = await ask(client, contract, address(contract, vesselId, audience));
            const denied = app.logged().slice(before).includes('"event":"denied"');
            const found = met(answer.status, answer.body?.code, denied);
            const wanted = expected(contract, principal, place, audience);
            cells += 1;
            if (found !== wanted)
              wrong.push(
                `${principal}, ${place}${audience ? `, ${audience} network` : ''}: ${wanted} wanted, ${answer.status} ${answer.body?.code ?? ''} met`,
              );
            if (answer.status >= 500) wrong.push(`${principal}, ${place}: ${answer.status}`);
          }
        }
      }
      expect(wrong).toEqual([]);
    },
    60_000,
  );

  test('counts its cells', () => {
    console.info(`permission matrix: ${endpoints.length} routes, ${cells} cells`);
    expect(cells).toBeGreaterThanOrEqual(endpoints.length * PRINCIPALS.length);
  });

  test('R15: somebody else’s vessel answers as one that does not exist, to the octet but for the request’s number', async () => {
    const client = await clientFor('captain', 'own');
    const strip = (text: string) => text.replace(/"requestId":"[^"]*"/, '');
    for (const { contract } of endpoints) {
      if (contract.access.kind !== 'vessel') continue;
      const foreign = await ask(client, contract, address(contract, the().foreign, null));
      const nothing = await ask(client, contract, address(contract, randomUUID(), null));
      expect([foreign.status, strip(foreign.text)], contract.name).toEqual([
        nothing.status,
        strip(nothing.text),
      ]);
    }
  }, 60_000);
});

describe('R14: nothing is outside the matrix', () => {
  test('every action of the table is used by a route, and every route uses actions of the table', () => {
    const used = new Set<string>(
      endpoints.flatMap(({ contract }) => (contract.access.kind === 'vessel' ? contract.access.actions : [])),
    );
    for (const action of used) expect(Object.keys(VESSEL_PERMISSIONS)).toContain(action);
    expect(Object.keys(VESSEL_PERMISSIONS).filter((action) => !used.has(action))).toEqual([]);
  });

  test('every route is in the OpenAPI document, and the document names no other', async () => {
    const document = (await anonymousClient(app).get('/openapi.json').expect(200)).body as {
      paths: Record<string, object>;
    };
    const documented = Object.entries(document.paths).flatMap(([path, entry]) =>
      Object.keys(entry).map((method) => `${method.toUpperCase()} ${path}`),
    );
    const served = [
      'GET /health',
      'GET /openapi.json',
      ...endpoints.map(({ contract }) => `${contract.method} ${contract.path.replace(/:(\w+)/g, '{$1}')}`),
    ];
    expect([...documented].sort()).toEqual([...served].sort());
  });

  test('an unknown method on a known address is refused, an unknown address is not found', async () => {
    const client = await clientFor('captain', 'own');
    await client.delete('/session/nothing-here').expect(404);
    const answer = await client.patch('/openapi.json');
    expect([404, 405]).toContain(answer.status);
  });
});
