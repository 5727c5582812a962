import { randomUUID } from 'node:crypto';
import { parse } from 'csv-parse/sync';
import { describe, expect, test } from 'vitest';
import type { FleetVesselView, FleetView } from '../../../shared/api/fleet.ts';
import { useApp } from '../../support/app.ts';
import { Client } from '../../support/client.ts';
import { factories } from '../../support/factories.ts';
import { type Aboard, holder, leak, rotation } from './rows.ts';

const app = useApp();
const make = factories(app);
const DAY = 86_400_000;
const ago = (days: number) => new Date(app.clock.now().getTime() - days * DAY);

async function serviceDesk(name?: string) {
  const dealerId = await make.dealer(name);
  const person = await make.dealerMember(dealerId);
  return { dealerId, client: new Client(app, await make.session(person.id)) };
}

const secret = () => `canary-${randomUUID()}`;

/** A vessel with its three networks, of the ages given in days. */
async function vessel(
  dealerId: string,
  name: string,
  ages: { owner?: number; guest?: number; crew?: number },
  zone?: string,
): Promise<Aboard> {
  const id = await make.vessel({ dealerId, name, zone });
  const networks: Aboard['networks'] = {};
  for (const audience of ['owner', 'guest', 'crew'] as const) {
    const age = ages[audience];
    if (age === undefined) continue;
    networks[audience] = await make.network(id, {
      ssid: `${name} ${audience}`,
      audience,
      live: secret(),
      liveAt: ago(age),
    });
  }
  return { id, networks };
}

const read = async (client: Client, query = ''): Promise<FleetView> => {
  const answer = await client.get(`/fleet${query}`);
  expect(answer.status, answer.text).toBe(200);
  return answer.body as FleetView;
};

describe('the fleet', () => {
  test('says what is so, worst first, with the figures of a plain count', async () => {
    const { dealerId, client } = await serviceDesk('Halden & Roe Marine Systems');
    const solveig = await vessel(dealerId, 'Solveig Maren', { owner: 212, guest: 61, crew: 388 });
    const corvina = await vessel(dealerId, 'Corvina', { owner: 402, guest: 9, crew: 30 });
    const tamarisk = await vessel(dealerId, 'Tamarisk', { owner: 182, guest: 0.1, crew: 41 });
    await vessel(dealerId, 'Lumen Tide', { owner: 88, guest: 5, crew: 12 });
    await holder(app, solveig, 'crew', { departed: ago(2) });
    await holder(app, solveig, 'crew', { departed: ago(90) });
    await holder(app, solveig, 'crew', {});
    await holder(app, tamarisk, 'crew', { departed: ago(1) });
    await rotation(app, corvina, 'owner', {
      state: 'planned',
      reasons: [{ code: 'owner_aboard', until: ago(-9).toISOString() }],
    });

    const fleet = await read(client);
    expect(fleet.dealer.name).toBe('Halden & Roe Marine Systems');
    expect(fleet.figures).toEqual({
      vessels: 4,
      networks: 12,
      ageUnknown: 0,
      pastLimit: 3,
      pastLimitExposed: 1,
      heldByDeparted: 2,
      exposed: 2,
    });
    expect(fleet.sentence).toBe(
      '3 networks are past their limit. On 1 of them, people who have left still hold the live passphrase.',
    );
    expect(fleet.vessels.map((row) => row.name)).toEqual([
      'Solveig Maren',
      'Corvina',
      'Tamarisk',
      'Lumen Tide',
    ]);
    const [first, second, third, last] = fleet.vessels;
    expect(first).toMatchObject({
      standing: 'exposed',
      departedHolding: 2,
      ages: {
        owner: { days: 212, limitDays: 365, pastLimit: false },
        guest: { days: 61, limitDays: 14, pastLimit: true },
        crew: { days: 388, limitDays: 45, pastLimit: true },
      },
      weakest: { audience: 'owner', words: 'Owner, centuries to guess' },
      nextChange: { kind: 'none', words: 'None planned' },
    });
    expect(second).toMatchObject({
      standing: 'overdue',
      departedHolding: 0,
      nextChange: { kind: 'held', audience: 'owner', words: 'held: owner aboard' },
    });
    expect(third).toMatchObject({ standing: 'exposed', ages: { guest: { days: 0 } } });
    expect(last).toMatchObject({ standing: 'in_order' });
    expect(fleet.networks).toHaveLength(12);
    const worst = fleet.networks.reduce((one, other) => (other.ratio > one.ratio ? other : one));
    expect(worst).toMatchObject({
      vesselName: 'Solveig Maren',
      audience: 'crew',
      exposedCount: 2,
      ratio: 8.6222,
    });
  });

  test('an age is past its limit a moment after it, not at it', async () => {
    const { dealerId, client } = await serviceDesk();
    await vessel(dealerId, 'At the limit', { crew: 45 });
    expect((await read(client)).figures.pastLimit).toBe(0);
    app.clock.advance(1);
    expect((await read(client)).figures.pastLimit).toBe(1);
  });

  test('the worst of several networks of one audience stands for them', async () => {
    const { dealerId, client } = await serviceDesk();
    const { id } = await vessel(dealerId, 'Two crew networks', { crew: 3 });
    const old = await make.network(id, {
      ssid: 'Crew deck',
      audience: 'crew',
      live: secret(),
      liveAt: ago(50),
    });
    const [row] = (await read(client)).vessels;
    expect(row?.ages.crew).toEqual({ networkId: old.id, days: 50, limitDays: 45, pastLimit: true });
    expect(row?.ages.owner).toBeNull();
  });

  test('a network without a passphrase on record is counted and said', async () => {
    const { dealerId, client } = await serviceDesk();
    const id = await make.vessel({ dealerId, name: 'New one' });
    await make.network(id, { audience: 'crew' });
    const fleet = await read(client);
    expect(fleet.figures).toMatchObject({ networks: 1, ageUnknown: 1, pastLimit: 0 });
    expect(fleet.networks).toEqual([]);
    expect(fleet.vessels[0]).toMatchObject({
      standing: 'due',
      weakest: null,
      ages: { crew: { days: null } },
    });
  });

  test('a lost card exposes, and its withdrawal ends that', async () => {
    const { dealerId, client } = await serviceDesk();
    const boat = await vessel(dealerId, 'Card lost', { guest: 2 });
    const withdraw = await leak(app, boat, 'guest');
    const lost = await read(client);
    expect(lost.figures).toMatchObject({ exposed: 1, heldByDeparted: 0 });
    expect(lost.vessels[0]?.standing).toBe('exposed');
    await withdraw();
    expect((await read(client)).figures.exposed).toBe(0);
  });

  test('sorts, filters, searches and pages the table, never the figures', async () => {
    const { dealerId, client } = await serviceDesk();
    await vessel(dealerId, 'Aurelia', { owner: 10, guest: 1, crew: 50 });
    await vessel(dealerId, 'Brisa', { owner: 300, guest: 3, crew: 2 });
    await vessel(dealerId, 'Calluna', { owner: 20, guest: 20, crew: 1 });
    const names = async (query: string) => (await read(client, query)).vessels.map((row) => row.name);
    expect(await names('?sort=name')).toEqual(['Aurelia', 'Brisa', 'Calluna']);
    expect(await names('?sort=owner')).toEqual(['Brisa', 'Calluna', 'Aurelia']);
    expect(await names('?sort=crew')).toEqual(['Aurelia', 'Brisa', 'Calluna']);
    expect(await names('?standing=overdue')).toEqual(['Calluna', 'Aurelia']);
    expect(await names('?search=%20bRI')).toEqual(['Brisa']);
    expect(await names('?search=100%25')).toEqual([]);
    expect(await names('?sort=name&limit=2&page=2')).toEqual(['Calluna']);
    const page = await read(client, '?sort=name&limit=1&page=1&standing=overdue');
    expect(page).toMatchObject({ matching: 2, page: 1, limit: 1, figures: { vessels: 3 } });
    expect(page.networks).toHaveLength(9);
  });

  test.each([
    'sort=bits',
    'sort=password',
    'limit=0',
    'limit=101',
    'page=0',
    'page=1000000000000',
    'standing=bad',
    'fields=bits',
    'sort=name&sort=owner',
  ])('R36: refuses %s', async (query) => {
    const { client } = await serviceDesk();
    expect((await client.get(`/fleet?${query}`)).status).toBe(422);
  });
});

describe('one vessel of the fleet', () => {
  test('its networks, and how its changes went', async () => {
    const { dealerId, client } = await serviceDesk();
    const boat = await vessel(dealerId, 'Petrel Hollow', { owner: 96, guest: 33, crew: 21 });
    await holder(app, boat, 'guest', { departed: ago(3) });
    await holder(app, boat, 'guest', {});
    await rotation(app, boat, 'crew', { state: 'live', due: ago(21.2), deadline: ago(20), live: ago(21) });
    await rotation(app, boat, 'owner', { state: 'live', due: ago(97), deadline: ago(97), live: ago(96) });
    await rotation(app, boat, 'guest', { state: 'unknown', due: ago(3), deadline: ago(19) });
    await rotation(app, boat, 'guest', { state: 'cancelled', due: ago(5), deadline: ago(4) });
    const answer = await client.get(`/fleet/vessels/${boat.id}`);
    expect(answer.status, answer.text).toBe(200);
    const view = answer.body as FleetVesselView;
    expect(view).toMatchObject({ name: 'Petrel Hollow', zone: 'Europe/Zagreb', standing: 'exposed' });
    const guest = view.networks.find((network) => network.audience === 'guest');
    expect(guest).toMatchObject({
      ageDays: 33,
      limitDays: 14,
      guess: 'centuries to guess',
      holders: 2,
      departedHolders: 1,
      standing: 'exposed',
      nextChange: { kind: 'unknown', words: 'no report from the boat' },
    });
    expect(view.history.map((change) => [change.audience, change.state, change.timing])).toEqual([
      ['guest', 'unknown', 'late'],
      ['guest', 'cancelled', null],
      ['crew', 'live', 'on_time'],
      ['owner', 'live', 'late'],
    ]);
    expect(answer.text).not.toContain('Ottoline Brandt');
  });
});

describe('the export', () => {
  test('R40: one line a network, quoted, and no formula from a vessel name', async () => {
    const { dealerId, client } = await serviceDesk();
    await vessel(dealerId, '=HYPERLINK("x"), Ltd', { owner: 400, crew: 3 });
    await vessel(dealerId, 'Žal, "Kraljica"', { guest: 1 });
    const answer = await client.post('/fleet/export');
    expect(answer.status).toBe(200);
    expect(answer.headers['content-type']).toBe('text/csv; charset=utf-8');
    expect(answer.headers['content-disposition']).toBe('attachment; filename="fleet-2026-06-14.csv"');
    const rows = parse(answer.text, { bom: true, columns: true, record_delimiter: '\r\n' }) as Record<
      string,
      string
    >[];
    expect(
      rows.map((row) => [row.Vessel, row.Audience, row['Age, days'], row['Past limit'], row.Passphrase]),
    ).toEqual([
      ['\'=HYPERLINK("x"), Ltd', 'Crew', '3', 'no', 'centuries to guess'],
      ['\'=HYPERLINK("x"), Ltd', 'Owner', '400', 'yes', 'centuries to guess'],
      ['Žal, "Kraljica"', 'Guest', '1', 'no', 'centuries to guess'],
    ]);
  });
});
