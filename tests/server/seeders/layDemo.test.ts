import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { passwordMatches } from '../../../server/auth/passwords.ts';
import { closeScorer } from '../../../server/passphrases/score.ts';
import { replanNetwork } from '../../../server/rotations/replan.ts';
import { sweep } from '../../../server/rotations/sweep.ts';
import { type DemoSignIn, layDemo } from '../../../server/seeders/layDemo.ts';
import type { FleetView } from '../../../shared/api/fleet.ts';
import { type TestApp, useApp } from '../../support/app.ts';
import { Client } from '../../support/client.ts';
import { factories } from '../../support/factories.ts';
import { brokenChains, plainFigures, shipDate } from './plainly.ts';

afterAll(closeScorer);

const system = <T extends object>(app: TestApp, sql: string, bind: Record<string, unknown> = {}) =>
  app.services.db.transaction({ kind: 'system' }, (tx) => app.services.db.rows<T>(tx, sql, bind));

/** Ship's time at Split: two hours ahead of UTC in summer, one in winter; clocks change at 01:00 UTC. */
describe.each([
  ['an afternoon', '2026-06-14T12:12:00Z'],
  ['half past midnight', '2026-06-13T22:30:00Z'],
  ['before the morning change', '2026-06-14T06:00:00Z'],
  ['half an hour after the clocks went forward', '2026-03-29T01:30:00Z'],
  ['the hour that comes twice', '2026-10-25T01:30:00Z'],
])('the demo fleet laid in %s', (_when, at) => {
  const app = useApp();
  const now = new Date(at);
  const told: DemoSignIn[] = [];

  beforeAll(async () => {
    app.clock.set(now);
    await layDemo(app.services, async (people) => {
      told.push(...people);
    });
  });

  test('a party of eight arrives today by ship’s time, three of them with the network', async () => {
    const parties = await system<{ id: string; name: string; arrives_at: Date }>(
      app,
      `SELECT p.id, p.name, p.arrives_at FROM parties p JOIN vessels v ON v.id = p.vessel_id WHERE v.name = 'Tamarisk'`,
    );
    const today = parties.filter((party) => shipDate(party.arrives_at) === shipDate(now));
    expect(today.map((party) => party.name)).toEqual(['Brandvold party']);
    const guests = await system<{
      id: string;
      name: string | null;
      label: string;
      language: string;
      under_16: boolean;
    }>(app, 'SELECT id, name, label, language, under_16 FROM guests WHERE party_id = $id ORDER BY position', {
      id: today[0]?.id,
    });
    expect(guests).toHaveLength(8);
    expect(guests.filter((guest) => guest.name === null).map((guest) => guest.label)).toEqual(['Guest 8']);
    expect(guests.filter((guest) => guest.under_16)).toHaveLength(2);
    expect(new Set(guests.map((guest) => guest.language)).size).toBeGreaterThanOrEqual(4);
    const ids = guests.map((guest) => guest.id);
    const cards = await system<{ serial: string; state: string }>(
      app,
      'SELECT serial, state FROM cards WHERE guest_id = ANY($ids::uuid[]) ORDER BY serial',
      { ids },
    );
    expect(cards.map((card) => card.serial)).toEqual(
      [1182, 1183, 1184, 1185, 1186, 1187, 1188, 1189].map((n) => `M-${n}`),
    );
    const handed = await system(
      app,
      'SELECT 1 FROM holders WHERE holder_id = ANY($ids::uuid[]) AND departed_at IS NULL',
      { ids },
    );
    expect(handed).toHaveLength(3);
  });

  test('46 vessels, 138 networks, one live passphrase each, and nothing happened in the future', async () => {
    const counts = await system(
      app,
      `SELECT (SELECT count(*)::int FROM vessels) AS vessels, (SELECT count(*)::int FROM networks) AS networks,
        (SELECT count(*)::int FROM networks n WHERE (SELECT count(*) FROM passphrases p WHERE p.network_id = n.id
           AND p.live_at IS NOT NULL AND p.retired_at IS NULL) = 1) AS with_one,
        (SELECT count(*)::int FROM passphrases p JOIN passphrase_secrets s ON s.passphrase_id = p.id
           WHERE p.retired_at IS NULL AND s.sealed IS NULL) AS forgotten,
        (SELECT count(*)::int FROM networks n WHERE n.last_ticket < (SELECT coalesce(max(ticket), 0) FROM rotations r
           WHERE r.network_id = n.id)) AS tickets_behind`,
    );
    expect(counts).toEqual([{ vessels: 46, networks: 138, with_one: 138, forgotten: 0, tickets_behind: 0 }]);
    const future = await system(
      app,
      `SELECT 'log' AS what, kind FROM log_entries WHERE at > $now
       UNION ALL SELECT 'live', network_id::text FROM passphrases WHERE live_at > $now
       UNION ALL SELECT 'handover', channel FROM handovers WHERE at > $now
       UNION ALL SELECT 'departed', through FROM holders WHERE departed_at > $now OR since > $now OR departed_at < since
       UNION ALL SELECT 'card', serial FROM cards WHERE printed_at > $now OR handed_over_at > $now
       UNION ALL SELECT 'change', state FROM rotations WHERE live_at > $now OR (state = 'planned' AND due_at < $now)
       UNION ALL SELECT 'vessel', name FROM vessels WHERE last_heard_at > $now`,
      { now },
    );
    expect(future).toEqual([]);
  });

  test('R46: every chain of the log holds', async () => {
    const { entries, broken } = await brokenChains(app);
    expect(entries).toBeGreaterThan(400);
    expect(broken).toEqual([]);
  });

  test('the fleet’s first line says what a plain count says', async () => {
    const [desk] = await system<{ id: string }>(app, 'SELECT person_id AS id FROM dealer_members');
    const client = new Client(app, await factories(app).session(desk?.id ?? ''));
    const fleet = (await client.get('/fleet')).body as FleetView;
    expect(fleet.figures).toEqual(await plainFigures(app, now));
    expect(fleet.sentence).toBe(
      '9 networks are past their limit. On 4 of them, people who have left still hold the live passphrase.',
    );
    const row = (name: string) => fleet.vessels.find((vessel) => vessel.name === name);
    expect(fleet.vessels).toHaveLength(46);
    expect(fleet.vessels[0]?.name).toBe('Solveig Maren');
    expect(row('Solveig Maren')).toMatchObject({
      departedHolding: 11,
      nextChange: { kind: 'none' },
      weakest: { words: 'Crew, hours to guess' },
      ages: {
        owner: { days: 212 },
        guest: { days: 61, pastLimit: true },
        crew: { days: 388, pastLimit: true },
      },
    });
    expect(row('Corvina')).toMatchObject({
      nextChange: { kind: 'held', words: 'held: owner aboard' },
      ages: { owner: { days: 402, pastLimit: true } },
    });
    expect(row('Petrel Hollow')).toMatchObject({
      silent: true,
      departedHolding: 6,
      nextChange: { kind: 'unknown', audience: 'guest' },
    });
    expect(row('Anselma')).toMatchObject({
      departedHolding: 1,
      nextChange: { kind: 'due', audience: 'crew' },
    });
    expect(row('Tamarisk')).toMatchObject({
      departedHolding: 2,
      ages: { owner: { days: 182 }, crew: { days: 41 } },
    });
    expect(row('Tamarisk')?.ages.guest?.days).toBeLessThanOrEqual(1);
    // The oracles search these answers for every passphrase and every guest's name after the test.
    for (const vessel of fleet.vessels.slice(0, 8)) {
      expect((await client.get(`/fleet/vessels/${vessel.vesselId}`)).status).toBe(200);
    }
    expect((await client.post('/fleet/export')).status).toBe(200);
  });

  test('the plan looked at again says the same', async () => {
    const networks = await system<{ id: string }>(
      app,
      "SELECT network_id AS id FROM rotations WHERE state = 'planned'",
    );
    expect(networks.length).toBeGreaterThan(130);
    const { services } = app;
    for (const { id } of networks) {
      const again = await services.db.transaction({ kind: 'system' }, (tx) =>
        replanNetwork(services, tx, id, now),
      );
      expect(again).toMatchObject({ changed: false });
    }
  });

  test('everybody on the sign-in list can be found, with that password and those roles', async () => {
    expect(told.map((person) => person.role)).toEqual([
      'Dealer, service desk',
      'Captain',
      'Chief stew',
      'Purser',
      'ETO',
      'Crew member',
      'Captain',
      'Captain',
    ]);
    for (const person of told) {
      const [found] = await system<{ password_hash: string; demo: boolean; vessel: string | null }>(
        app,
        `SELECT p.password_hash, p.demo, v.name AS vessel FROM people p
         LEFT JOIN memberships m ON m.person_id = p.id LEFT JOIN vessels v ON v.id = m.vessel_id WHERE p.email = $email`,
        { email: person.email },
      );
      expect(found?.demo).toBe(true);
      expect(found?.vessel ?? 'Halden & Roe Marine Systems').toBe(person.vessel);
      expect(person.email).toMatch(/\.example$/);
      expect(await passwordMatches(app.services.config, found?.password_hash ?? null, person.password)).toBe(
        true,
      );
    }
  });

  test('the clock’s first look plans what was left without a plan, and starts nothing', async () => {
    expect(await sweep(app.services)).toMatchObject({ planned: 3, handedOut: 0, held: 0, unknown: 0 });
  });

  test('is laid once', async () => {
    const again = await layDemo(app.services, async () => {
      throw new Error('nobody is told twice');
    });
    expect(again).toBeNull();
    expect(await system(app, 'SELECT count(*)::int AS n FROM vessels')).toEqual([{ n: 46 }]);
  });
});

describe('laying the demo fleet', () => {
  const app = useApp();
  const kept: number[] = [];
  const keep = async (people: readonly DemoSignIn[]) => {
    kept.push(people.length);
  };

  test('never in production', async () => {
    const services = { ...app.services, config: { ...app.services.config, production: true } };
    await expect(layDemo(services, keep)).rejects.toThrow('never laid in production');
    expect(await system(app, 'SELECT 1 FROM vessels')).toEqual([]);
  });

  test('leaves nothing behind when nobody could be told the passwords', async () => {
    await expect(
      layDemo(app.services, async () => {
        throw new Error('the disk is full');
      }),
    ).rejects.toThrow('the disk is full');
    expect(await system(app, 'SELECT 1 FROM vessels UNION ALL SELECT 1 FROM people')).toEqual([]);
  });

  test('two at once lay one fleet and tell one list of passwords', async () => {
    const both = await Promise.all([layDemo(app.services, keep), layDemo(app.services, keep)]);
    expect(both.filter((people) => people !== null)).toHaveLength(1);
    expect(kept).toEqual([8]);
    expect(await system(app, 'SELECT count(*)::int AS n FROM vessels')).toEqual([{ n: 46 }]);
  });
});
