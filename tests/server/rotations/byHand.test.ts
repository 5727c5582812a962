import { beforeAll, describe, expect, test } from 'vitest';
import { sweep } from '../../../server/rotations/sweep.ts';
import { useApp } from '../../support/app.ts';
import { Client } from '../../support/client.ts';
import { factories } from '../../support/factories.ts';

const app = useApp();
const make = factories(app);

async function boat(audience: 'guest' | 'crew' | 'owner' = 'crew') {
  const vesselId = await make.vessel();
  const points = [await make.accessPoint(vesselId, 'Salon'), await make.accessPoint(vesselId, 'Sundeck')];
  const network = await make.network(vesselId, {
    audience,
    ageLimitDays: 30,
    live: `old ${vesselId.slice(0, 13)} word`,
    liveAt: new Date(app.clock.now().getTime() - 5 * 86_400_000),
  });
  const as = async (role: 'captain' | 'chief_stew' | 'purser' | 'eto') =>
    new Client(app, await make.session((await make.member(vesselId, role)).id));
  return { vesselId, network, points, as };
}

const rows = (sql: string, bind: Record<string, unknown>) =>
  app.services.db.transaction({ kind: 'system' }, (tx) => app.services.db.rows(tx, sql, bind));

describe('a change entered by hand', () => {
  test('the chief stew changes the crew network, the ETO enters it with one typing error first (R52, D1, I3)', async () => {
    const { vesselId, network, points, as } = await boat();
    const stew = await as('chief_stew');
    const eto = await as('eto');
    const base = `/vessels/${vesselId}`;

    const started = await stew
      .post(`${base}/networks/${network.id}/rotations/now`, { reason: 'routine' })
      .expect(201);
    expect(started.body.state).toBe('staged');
    expect(started.body.toTry).toEqual(['old']);
    const id = started.body.id;
    await stew.post(`${base}/rotations/${id}/sheet`).expect(403);
    const early = await eto
      .post(`${base}/rotations/${id}/access-points/${points[0]}/confirm`, { typed: 'whatever it was' })
      .expect(409);
    expect(early.body.detail).toContain('entry sheet');

    const sheet = await eto.post(`${base}/rotations/${id}/sheet`).expect(200);
    const { passphrase, parts } = sheet.body;
    expect(parts.join('')).toBe(passphrase);
    const opened = await eto.get(`${base}/rotations/${id}`).expect(200);
    expect(opened.body.state).toBe('handed_out');
    expect(opened.body.toTry).toEqual(['new', 'old']);
    expect(opened.text).not.toContain(passphrase);
    await stew.post(`${base}/rotations/${id}/cancel`).expect(409);

    const confirm = (point: string | undefined, typed: string) =>
      eto.post(`${base}/rotations/${id}/access-points/${point}/confirm`, { typed });
    const short = await confirm(points[0], passphrase.slice(0, -2)).expect(422);
    expect(short.body.errors).toEqual({ typed: ['That is 2 characters shorter than it should be.'] });
    const wrong = await confirm(points[0], `${passphrase.slice(0, -1)}#`).expect(422);
    expect(wrong.body.detail).toBe(
      'The length is right, but something differs. Look at the sheet and type it again.',
    );

    const half = await confirm(points[0], passphrase).expect(200);
    expect(half.body).toMatchObject({ state: 'applying', verified: 1, of: 2 });
    await confirm(points[0], passphrase).expect(200);
    const done = await confirm(points[1], passphrase).expect(200);
    expect(done.body).toMatchObject({ state: 'live', verified: 2, of: 2, toTry: ['new'] });

    const passphrases = await rows(
      'SELECT generation, live_at IS NOT NULL AS live, retired_at IS NOT NULL AS retired FROM passphrases WHERE network_id = $id ORDER BY generation',
      { id: network.id },
    );
    expect(passphrases).toEqual([
      { generation: 1, live: true, retired: true },
      { generation: 2, live: true, retired: false },
    ]);
    const kinds = await rows('SELECT kind FROM log_entries WHERE network_id = $id ORDER BY seq', {
      id: network.id,
    });
    expect(kinds.map((row) => (row as { kind: string }).kind)).toEqual([
      'rotation.planned',
      'rotation.staged',
      'rotation.handed_out',
      'rotation.sheet_opened',
      'rotation.access_point',
      'rotation.applying',
      'rotation.access_point',
      'rotation.access_point',
      'rotation.live',
      'passphrase.retired',
      'rotation.planned',
    ]);
    const list = await stew.get(`${base}/rotations`).expect(200);
    expect(list.body.calendar).toHaveLength(1);
    expect(list.body.history.map((one: { state: string }) => one.state)).toEqual(['live']);
  });

  test('ten tries a minute, then a wait; the next minute is free again', async () => {
    const { vesselId, network, points, as } = await boat();
    const captain = await as('captain');
    const base = `/vessels/${vesselId}`;
    const { body } = await captain.post(`${base}/networks/${network.id}/rotations/now`).expect(201);
    await captain.post(`${base}/rotations/${body.id}/sheet`).expect(200);
    const path = `${base}/rotations/${body.id}/access-points/${points[0]}/confirm`;
    for (let tries = 0; tries < 10; tries++) await captain.post(path, { typed: 'not it' }).expect(422);
    const refused = await captain.post(path, { typed: 'not it' }).expect(429);
    expect(Number(refused.headers['retry-after'])).toBeGreaterThan(0);
    app.clock.advance(61_000);
    await captain.post(path, { typed: 'not it' }).expect(422);
  });

  test('nothing derived from what was typed is kept', async () => {
    const kept = await rows(
      "SELECT route FROM idempotency_keys WHERE route LIKE '%confirm%' OR route LIKE '%heet%'",
      {},
    );
    expect(kept).toEqual([]);
  });

  test('given up after the sheet was opened: a higher ticket back to the old passphrase, verified like any other (I4)', async () => {
    const { vesselId, network, points, as } = await boat();
    const captain = await as('captain');
    const base = `/vessels/${vesselId}`;
    const { body: first } = await captain.post(`${base}/networks/${network.id}/rotations/now`).expect(201);
    const sheet = await captain.post(`${base}/rotations/${first.id}/sheet`).expect(200);
    await captain
      .post(`${base}/rotations/${first.id}/access-points/${points[0]}/confirm`, {
        typed: sheet.body.passphrase,
      })
      .expect(200);
    const conflict = await captain.post(`${base}/networks/${network.id}/rotations/now`).expect(409);
    expect(conflict.body.errors.rotation).toEqual([first.id]);

    const { body: back } = await captain.post(`${base}/rotations/${first.id}/give-up`).expect(200);
    expect(back.ticket).toBe(first.ticket + 1);
    expect(back.reasons).toEqual([{ code: 'going_back', ticket: first.ticket }]);
    const stale = await captain
      .post(`${base}/rotations/${first.id}/access-points/${points[1]}/confirm`, {
        typed: sheet.body.passphrase,
      })
      .expect(409);
    expect(stale.body.code).toBe('conflict');
    const old = await captain.post(`${base}/rotations/${back.id}/sheet`).expect(200);
    expect(old.body.goingBack).toBe(true);
    expect(old.body.passphrase).toBe(`old ${vesselId.slice(0, 13)} word`);
    for (const point of points) {
      await captain
        .post(`${base}/rotations/${back.id}/access-points/${point}/confirm`, { typed: old.body.passphrase })
        .expect(200);
    }
    const states = await rows(
      'SELECT state FROM rotations WHERE network_id = $id ORDER BY created_at, ticket NULLS LAST',
      {
        id: network.id,
      },
    );
    expect(states).toEqual([{ state: 'superseded' }, { state: 'live' }, { state: 'planned' }]);
    const live = await rows(
      'SELECT generation FROM passphrases WHERE network_id = $id AND live_at IS NOT NULL AND retired_at IS NULL',
      {
        id: network.id,
      },
    );
    expect(live).toEqual([{ generation: 1 }]);
  });

  test('an access point nobody can reach leaves the change waiting for somebody, then it completes', async () => {
    const { vesselId, network, points, as } = await boat();
    const captain = await as('captain');
    const base = `/vessels/${vesselId}`;
    const { body } = await captain.post(`${base}/networks/${network.id}/rotations/now`).expect(201);
    const { body: sheet } = await captain.post(`${base}/rotations/${body.id}/sheet`).expect(200);
    const at = (point: string | undefined) => `${base}/rotations/${body.id}/access-points/${point}`;
    await captain.post(`${at(points[0])}/confirm`, { typed: sheet.passphrase }).expect(200);
    const waiting = await captain.post(`${at(points[1])}/unreachable`, { note: 'no ladder.' }).expect(200);
    expect(waiting.body).toMatchObject({ state: 'needs_somebody', verified: 1 });
    expect(waiting.body.detail).toBe(
      'Sundeck could not be reached: no ladder. Enter the new passphrase there as soon as it can be, then confirm it.',
    );
    const done = await captain.post(`${at(points[1])}/confirm`, { typed: sheet.passphrase }).expect(200);
    expect(done.body.state).toBe('live');

    const drifted = await captain.post(`${at(points[0])}/drift`, { seen: 'old' }).expect(200);
    expect(drifted.body).toMatchObject({ state: 'drifted', toTry: ['new', 'old'] });
    await captain.post(`${at(points[0])}/put-right`, { typed: 'not it at all' }).expect(422);
    const right = await captain.post(`${at(points[0])}/put-right`, { typed: sheet.passphrase }).expect(200);
    expect(right.body.state).toBe('live');
  });

  test('due and entered by hand: somebody is asked; without a report for a day, it is not known (R57, R58)', async () => {
    const { vesselId, network, as } = await boat();
    const captain = await as('captain');
    const base = `/vessels/${vesselId}`;
    const { body } = await captain.post(`${base}/networks/${network.id}/rotations/now`).expect(201);
    await sweep(app.services);
    const asked = await captain.get(`${base}/rotations/${body.id}`).expect(200);
    expect(asked.body).toMatchObject({ state: 'needs_somebody', toTry: ['old'], handedOutAt: null });
    await captain.post(`${base}/rotations/${body.id}/sheet`).expect(200);
    app.clock.advance(25 * 3_600_000);
    await sweep(app.services);
    const later = new Client(app, await make.session((await make.member(vesselId, 'captain')).id));
    const unknown = await later.get(`${base}/rotations/${body.id}`).expect(200);
    expect(unknown.body).toMatchObject({ state: 'unknown', toTry: ['new', 'old'] });
    expect(await rows('SELECT id FROM passphrases WHERE network_id = $id', { id: network.id })).toHaveLength(
      2,
    );
  });
});

describe('refusals and their permitted twins', () => {
  let other: Awaited<ReturnType<typeof boat>>;
  beforeAll(async () => {
    other = await boat();
  });

  test("another vessel's network and change are not found", async () => {
    const mine = await boat();
    const captain = await mine.as('captain');
    const theirs = await (await other.as('captain')).post(
      `/vessels/${other.vesselId}/networks/${other.network.id}/rotations/now`,
    );
    expect(theirs.status).toBe(201);
    await captain.post(`/vessels/${mine.vesselId}/networks/${other.network.id}/rotations/now`).expect(404);
    for (const path of ['cancel', 'give-up', 'sheet', 'move', 'go-on'])
      await captain
        .post(
          `/vessels/${mine.vesselId}/rotations/${theirs.body.id}/${path}`,
          path === 'move' ? { dueAt: '2027-01-01T00:00:00Z' } : {},
        )
        .expect(404);
    await captain.get(`/vessels/${mine.vesselId}/rotations/${theirs.body.id}`).expect(404);
  });

  test('each audience has its own planners; the owner network asks for a fresh proof at the sheet', async () => {
    const owner = await boat('owner');
    const path = `/vessels/${owner.vesselId}/networks/${owner.network.id}/rotations/now`;
    await (await owner.as('chief_stew')).post(path).expect(403);
    const session = await make.session((await make.member(owner.vesselId, 'captain')).id);
    const captain = new Client(app, session);
    const { body } = await captain.post(path).expect(201);
    app.clock.advance(11 * 60_000);
    const stale = await captain.post(`/vessels/${owner.vesselId}/rotations/${body.id}/sheet`).expect(403);
    expect(stale.body.code).toBe('step_up');
    const fresh = await owner.as('captain');
    await fresh.post(`/vessels/${owner.vesselId}/rotations/${body.id}/sheet`).expect(200);
  });

  test('a network with equipment is not changed during a crossing, and nobody overrides it', async () => {
    const vesselId = await make.vessel();
    await make.accessPoint(vesselId, 'Bridge');
    const network = await make.network(vesselId, {
      audience: 'crew',
      carriesEquipment: true,
      live: 'bridge and alarm words',
    });
    const captain = new Client(app, await make.session((await make.member(vesselId, 'captain')).id));
    const { body: planned } = await captain
      .post(`/vessels/${vesselId}/networks/${network.id}/rotations`, {
        dueAt: new Date(app.clock.now().getTime() + 3_600_000).toISOString(),
      })
      .expect(201);
    await rows(
      `INSERT INTO voyages(id, vessel_id, kind, title, starts_at, ends_at, created_at, updated_at)
       VALUES (gen_random_uuid(), $vessel, 'crossing', 'Corfu', $from, $until, $from, $from) RETURNING id`,
      {
        vessel: vesselId,
        from: app.clock.now(),
        until: new Date(app.clock.now().getTime() + 2 * 86_400_000),
      },
    );
    const refused = await captain
      .post(`/vessels/${vesselId}/networks/${network.id}/rotations/now`, { urgent: true })
      .expect(409);
    expect(refused.body.detail).toContain('crossing');
    app.clock.advance(2 * 3_600_000);
    await sweep(app.services);
    const later = new Client(app, await make.session((await make.member(vesselId, 'captain')).id));
    expect((await later.get(`/vessels/${vesselId}/rotations/${planned.id}`)).body.state).toBe('staged');
    await later.post(`/vessels/${vesselId}/rotations/${planned.id}/sheet`).expect(409);
    app.clock.advance(2 * 86_400_000);
    await sweep(app.services);
    const inPort = new Client(app, await make.session((await make.member(vesselId, 'captain')).id));
    expect((await inPort.get(`/vessels/${vesselId}/rotations/${planned.id}`)).body.state).toBe(
      'needs_somebody',
    );
  });

  test('no access points listed: nothing could be verified, so nothing is changed (I3)', async () => {
    const vesselId = await make.vessel();
    const network = await make.network(vesselId, { audience: 'crew', live: 'no points listed here' });
    const captain = new Client(app, await make.session((await make.member(vesselId, 'captain')).id));
    await captain.post(`/vessels/${vesselId}/networks/${network.id}/rotations/now`).expect(409);
    await sweep(app.services);
    app.clock.advance(60 * 86_400_000);
    await sweep(app.services);
    const states = await rows('SELECT state FROM rotations WHERE network_id = $id', { id: network.id });
    expect(states).toEqual([{ state: 'planned' }]);
  });

  test('cancelled before it left: the staged passphrase is never used and the plan sets the next, later', async () => {
    const { vesselId, network, as } = await boat();
    await sweep(app.services);
    const captain = await as('captain');
    const base = `/vessels/${vesselId}`;
    const { body: list } = await captain.get(`${base}/rotations`).expect(200);
    expect(list.calendar).toHaveLength(1);
    const planned = list.calendar[0];
    const moved = await captain
      .post(`${base}/rotations/${planned.id}/move`, {
        dueAt: new Date(app.clock.now().getTime() + 7_200_000).toISOString(),
      })
      .expect(200);
    expect(moved.body.plannedBy).toBe('person');
    await sweep(app.services);
    const { body } = await captain.post(`${base}/rotations/${planned.id}/cancel`).expect(200);
    expect(body.cancelled.state).toBe('cancelled');
    expect(body.cancelled.stagedAt).not.toBeNull();
    expect(body.next.state).toBe('planned');
    expect(
      await rows(
        'SELECT 1 FROM passphrases WHERE network_id = $id AND live_at IS NULL AND retired_at IS NOT NULL',
        { id: network.id },
      ),
    ).toHaveLength(1);

    const { body: again } = await captain.post(`${base}/rotations/${body.next.id}/cancel`).expect(200);
    expect(new Date(again.next.dueAt).getTime()).toBeGreaterThanOrEqual(
      new Date(body.next.dueAt).getTime() + 12 * 3_600_000,
    );
    expect(again.next.reasons.map((reason: { code: string }) => reason.code)).toContain('put_off');
  });
});
