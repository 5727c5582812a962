import { describe, expect, test } from 'vitest';
import { carryOut } from '../../../server/delivery/rehearsal.ts';
import { purgeRetired } from '../../../server/rotations/purge.ts';
import { replanNetwork } from '../../../server/rotations/replan.ts';
import { stageBatch, sweep } from '../../../server/rotations/sweep.ts';
import { PURGE_AFTER_MS } from '../../../shared/rules/rotation.ts';
import { useApp } from '../../support/app.ts';
import { Client } from '../../support/client.ts';
import { factories } from '../../support/factories.ts';
import { layDueChanges } from '../../support/seaTrial.ts';

const app = useApp();
const make = factories(app);
const HOUR = 3_600_000;

const rows = <T extends object>(sql: string, bind: Record<string, unknown>) =>
  app.services.db.transaction({ kind: 'system' }, (tx) => app.services.db.rows<T>(tx, sql, bind));
const run = (sql: string, bind: Record<string, unknown>) =>
  app.services.db.transaction({ kind: 'system' }, (tx) => app.services.db.run(tx, sql, bind));

async function rehearsalBoat() {
  const vesselId = await make.vessel({ driver: 'rehearsal' });
  const points = [await make.accessPoint(vesselId, 'Salon'), await make.accessPoint(vesselId, 'Sundeck')];
  const network = await make.network(vesselId, {
    audience: 'crew',
    live: `words of ${vesselId.slice(0, 8)} aboard`,
  });
  for (const point of points) {
    await run(
      'INSERT INTO rehearsal_access_points(access_point_id, network_id, vessel_id, passphrase_id) VALUES ($point, $network, $vessel, $passphrase)',
      { point, network: network.id, vessel: vesselId, passphrase: network.passphraseId },
    );
  }
  const asCaptain = async () =>
    new Client(app, await make.session((await make.member(vesselId, 'captain')).id));
  return { vesselId, points, network, asCaptain };
}

const orderOf = async (id: string) => {
  const [row] = await rows<{ epoch: number; ticket: string }>(
    'SELECT epoch, ticket FROM rotations WHERE id = $id',
    { id },
  );
  return { rotationId: id, epoch: row?.epoch, ticket: Number(row?.ticket) };
};
const stateOf = async (id: string) =>
  (await rows<{ state: string }>('SELECT state FROM rotations WHERE id = $id', { id }))[0]?.state;

describe('the rehearsal goes through the same machine', () => {
  test('carried out twice and by two at once, it happened once', async () => {
    const boat = await rehearsalBoat();
    const captain = await boat.asCaptain();
    const { body } = await captain
      .post(`/vessels/${boat.vesselId}/networks/${boat.network.id}/rotations/now`)
      .expect(201);
    expect(body.state).toBe('handed_out');
    const order = await orderOf(body.id);
    await Promise.allSettled([carryOut(app.services, order), carryOut(app.services, order)]);
    await carryOut(app.services, order);
    expect(await stateOf(body.id)).toBe('live');
    const view = await captain.get(`/vessels/${boat.vesselId}/rotations/${body.id}`).expect(200);
    expect(view.body.ways).toEqual(['journal', 'officer']);
    expect(view.body.accessPoints.map((one: { evidence: string }) => one.evidence)).toEqual(['E1', 'E1']);
    expect(await rows('SELECT 1 FROM observations WHERE rotation_id = $id', { id: body.id })).toHaveLength(2);
    expect(
      await rows("SELECT 1 FROM log_entries WHERE subject_id = $id AND kind = 'rotation.live'", {
        id: body.id,
      }),
    ).toHaveLength(1);
  });

  test('a silent access point is never rounded: not known, both to try, and on it goes with the same passphrase (R57, R58)', async () => {
    const boat = await rehearsalBoat();
    await run('UPDATE rehearsal_access_points SET silent = true WHERE access_point_id = $id', {
      id: boat.points[1],
    });
    const captain = await boat.asCaptain();
    const { body } = await captain
      .post(`/vessels/${boat.vesselId}/networks/${boat.network.id}/rotations/now`)
      .expect(201);
    const order = await orderOf(body.id);
    await carryOut(app.services, order);
    expect(await stateOf(body.id)).toBe('applying');
    app.clock.advance(16 * 60_000);
    await sweep(app.services);
    const view = await captain.get(`/vessels/${boat.vesselId}/rotations/${body.id}`).expect(200);
    expect(view.body).toMatchObject({ state: 'unknown', verified: 1, of: 2, toTry: ['new', 'old'] });
    expect(view.body.may.goOn).toBe(true);

    await run('UPDATE rehearsal_access_points SET silent = false WHERE access_point_id = $id', {
      id: boat.points[1],
    });
    await captain.post(`/vessels/${boat.vesselId}/rotations/${body.id}/go-on`).expect(200);
    await carryOut(app.services, order);
    expect(await stateOf(body.id)).toBe('live');
    expect(
      await rows('SELECT 1 FROM passphrases WHERE network_id = $id', { id: boat.network.id }),
    ).toHaveLength(2);
  });

  test('an order that is in the hands of a server that stopped is given again within a minute (R52)', async () => {
    const boat = await rehearsalBoat();
    const captain = await boat.asCaptain();
    const { body } = await captain
      .post(`/vessels/${boat.vesselId}/networks/${boat.network.id}/rotations/now`)
      .expect(201);
    const orders = () =>
      rows<{ data: unknown }>(
        "SELECT data FROM pgboss.job WHERE name = 'rehearsal.carryOut' AND data->>'rotationId' = $id",
        { id: body.id },
      );
    const order = await orderOf(body.id);
    expect(await orders()).toEqual([{ data: order }]);
    app.clock.advance(20_000);
    await sweep(app.services);
    expect(await orders()).toHaveLength(1);
    app.clock.advance(20_000);
    await Promise.all([sweep(app.services), sweep(app.services)]);
    expect(await orders()).toEqual([{ data: order }, { data: order }]);
    for (const _ of await orders()) await carryOut(app.services, order);
    expect(await stateOf(body.id)).toBe('live');
    app.clock.advance(60_000);
    await sweep(app.services);
    expect(await orders()).toHaveLength(2);
  });

  test("an older ticket's order is put aside after a newer one (I4)", async () => {
    const boat = await rehearsalBoat();
    const captain = await boat.asCaptain();
    const { body } = await captain
      .post(`/vessels/${boat.vesselId}/networks/${boat.network.id}/rotations/now`)
      .expect(201);
    const old = await orderOf(body.id);
    const { body: back } = await captain
      .post(`/vessels/${boat.vesselId}/rotations/${body.id}/give-up`)
      .expect(200);
    await carryOut(app.services, old);
    await carryOut(app.services, { ...(await orderOf(back.id)), ticket: old.ticket });
    expect(await stateOf(body.id)).toBe('superseded');
    expect(await stateOf(back.id)).toBe('handed_out');
    await carryOut(app.services, await orderOf(back.id));
    expect(await stateOf(back.id)).toBe('live');
    expect(
      await rows('SELECT DISTINCT passphrase_id FROM rehearsal_access_points WHERE network_id = $id', {
        id: boat.network.id,
      }),
    ).toEqual([{ passphrase_id: boat.network.passphraseId }]);
  });
});

describe('the clock', () => {
  test('due while no server ran: it happens at the next look, once; backwards nothing repeats (R50)', async () => {
    const boat = await rehearsalBoat();
    await sweep(app.services);
    const [planned] = await rows<{ id: string; due_at: Date }>(
      "SELECT id, due_at FROM rotations WHERE network_id = $id AND state = 'planned'",
      { id: boat.network.id },
    );
    app.clock.set(new Date((planned?.due_at.getTime() ?? 0) + 5 * HOUR));
    await Promise.all([sweep(app.services), sweep(app.services), sweep(app.services)]);
    await sweep(app.services);
    expect(await stateOf(planned?.id ?? '')).toBe('handed_out');
    app.clock.advance(-48 * HOUR);
    await sweep(app.services);
    expect(
      await rows('SELECT 1 FROM passphrases WHERE network_id = $id', { id: boat.network.id }),
    ).toHaveLength(2);
    expect(
      await rows("SELECT 1 FROM log_entries WHERE subject_id = $id AND kind = 'rotation.handed_out'", {
        id: planned?.id,
      }),
    ).toHaveLength(1);
    app.clock.advance(48 * HOUR);
  });

  test('a jump of more than a day: many at once wait for somebody, who lets them go on one by one (R50)', async () => {
    await sweep(app.services);
    const ids = await layDueChanges(app.services, 60);
    app.clock.advance(30 * HOUR);
    const swept = await sweep(app.services);
    expect(swept).toMatchObject({ staged: 60, handedOut: 0 });
    expect(swept.held).toBeGreaterThanOrEqual(60);
    const held = await rows<{ state: string; vessel_id: string; detail: string }>(
      'SELECT state, vessel_id, detail FROM rotations WHERE id = ANY($ids::uuid[])',
      { ids },
    );
    expect(new Set(held.map(({ state }) => state))).toEqual(new Set(['needs_somebody']));
    expect(held[0]?.detail).toContain('clock jumped');
    const [first = ''] = ids;
    const [row] = await rows<{ vessel_id: string }>('SELECT vessel_id FROM rotations WHERE id = $id', {
      id: first,
    });
    const captain = new Client(
      app,
      await make.session((await make.member(row?.vessel_id ?? '', 'captain')).id),
    );
    const { body } = await captain.post(`/vessels/${row?.vessel_id}/rotations/${first}/go-on`).expect(200);
    expect(body.state).toBe('handed_out');
    const more = await layDueChanges(app.services, 60);
    await sweep(app.services);
    expect(new Set(await Promise.all(more.map(stateOf)))).toEqual(new Set(['handed_out']));
  });

  test('a passphrase drawn twice on one vessel is drawn again before anything is stored (R20)', async () => {
    const vesselId = await make.vessel();
    await make.accessPoint(vesselId, 'Salon');
    const old = 'anchor-lantern-compass-harbour-rope';
    const network = await make.network(vesselId, { audience: 'guest', live: old });
    await rows('SELECT 1', {});
    const now = app.clock.now();
    await app.services.db.transaction({ kind: 'system' }, (tx) =>
      replanNetwork(app.services, tx, network.id, now),
    );
    await run('UPDATE rotations SET due_at = $now WHERE network_id = $id', { now, id: network.id });
    const draws = [old, old, 'windlass-capstan-bollard-fender-mooring'];
    const staged = await app.services.db.transaction({ kind: 'system' }, (tx) =>
      stageBatch(
        app.services,
        tx,
        { now, actor: null },
        { make: (words) => ({ passphrase: draws.shift() ?? '', bits: 64.62, words }) },
      ),
    );
    expect(staged.done).toBe(1);
    expect(draws).toEqual([]);
    expect(
      await rows('SELECT 1 FROM passphrase_secrets WHERE vessel_id = $vessel', { vessel: vesselId }),
    ).toHaveLength(2);
  });

  test('a guest change is staged two days ahead, any other one day', async () => {
    const vesselId = await make.vessel();
    await make.accessPoint(vesselId, 'Salon');
    const guest = await make.network(vesselId, { audience: 'guest', live: 'guests of the day before' });
    const crew = await make.network(vesselId, { audience: 'crew', live: 'crew of the day before' });
    const now = app.clock.now();
    await sweep(app.services);
    await run('UPDATE rotations SET due_at = $due WHERE vessel_id = $vessel', {
      vessel: vesselId,
      due: new Date(now.getTime() + 47 * HOUR),
    });
    const staged = async (network: string) =>
      (
        await rows<{ state: string }>('SELECT state FROM rotations WHERE network_id = $network', { network })
      )[0]?.state;
    await sweep(app.services);
    expect([await staged(guest.id), await staged(crew.id)]).toEqual(['staged', 'planned']);
    app.clock.advance(23 * HOUR);
    await sweep(app.services);
    expect(await staged(crew.id)).toBe('staged');
  });

  test('retired secrets are forgotten after their time, once everything is proven; the fingerprint stays', async () => {
    const boat = await rehearsalBoat();
    const captain = await boat.asCaptain();
    const { body } = await captain
      .post(`/vessels/${boat.vesselId}/networks/${boat.network.id}/rotations/now`)
      .expect(201);
    await carryOut(app.services, await orderOf(body.id));
    const kept = async () =>
      (
        await rows<{ kept: boolean }>(
          'SELECT sealed IS NOT NULL AS kept FROM passphrase_secrets WHERE passphrase_id = $id',
          {
            id: boat.network.passphraseId,
          },
        )
      )[0]?.kept;
    app.clock.advance(PURGE_AFTER_MS - 1);
    await purgeRetired(app.services);
    expect(await kept()).toBe(true);
    app.clock.advance(1);
    await run("UPDATE rotations SET state = 'drifted' WHERE id = $id", { id: body.id });
    await purgeRetired(app.services);
    expect(await kept()).toBe(true);
    await run("UPDATE rotations SET state = 'live' WHERE id = $id", { id: body.id });
    await purgeRetired(app.services);
    expect(await kept()).toBe(false);
    expect(
      await rows('SELECT 1 FROM passphrase_secrets WHERE passphrase_id = $id AND fingerprint IS NOT NULL', {
        id: boat.network.passphraseId,
      }),
    ).toHaveLength(1);
  });
});

describe('after an event the plan is looked at again', () => {
  const replan = (networkId: string) =>
    app.services.db.transaction({ kind: 'system' }, (tx) =>
      replanNetwork(app.services, tx, networkId, app.clock.now()),
    );
  const leak = (boat: { vesselId: string; network: { id: string; passphraseId: string | null } }) =>
    run(
      `INSERT INTO leaks(id, vessel_id, network_id, passphrase_id, kind, at) VALUES (gen_random_uuid(), $vessel, $network, $passphrase, 'reported', $now)`,
      {
        vessel: boat.vesselId,
        network: boat.network.id,
        passphrase: boat.network.passphraseId,
        now: app.clock.now(),
      },
    );

  test('a leak moves the plan up, also one a person chose, and never later', async () => {
    const boat = await rehearsalBoat();
    const first = await replan(boat.network.id);
    const captain = await boat.asCaptain();
    const chosen = new Date(app.clock.now().getTime() + 10 * 24 * HOUR);
    await captain
      .post(`/vessels/${boat.vesselId}/networks/${boat.network.id}/rotations`, {
        dueAt: chosen.toISOString(),
      })
      .expect(201);
    expect(await replan(boat.network.id)).toMatchObject({
      rotationId: first?.rotationId,
      dueAt: chosen,
      changed: false,
    });
    await leak(boat);
    const moved = await replan(boat.network.id);
    expect(moved?.changed).toBe(true);
    expect(moved?.dueAt.getTime()).toBeLessThan(chosen.getTime());
    app.clock.advance(HOUR / 2);
    const again = await replan(boat.network.id);
    expect(again?.dueAt).toEqual(moved?.dueAt);
  });

  test('a staged change is only moved earlier; one under way is left alone', async () => {
    const boat = await rehearsalBoat();
    await replan(boat.network.id);
    const due = new Date(app.clock.now().getTime() + 20 * HOUR);
    await run('UPDATE rotations SET due_at = $due WHERE network_id = $id', { due, id: boat.network.id });
    await sweep(app.services);
    expect(await replan(boat.network.id)).toMatchObject({ dueAt: due, changed: false });
    await leak(boat);
    const moved = await replan(boat.network.id);
    expect(moved?.dueAt.getTime()).toBeLessThan(due.getTime());
    app.clock.set(moved?.dueAt ?? due);
    await sweep(app.services);
    expect(await replan(boat.network.id)).toBeNull();
  });
});
