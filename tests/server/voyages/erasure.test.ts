import { describe, expect, test } from 'vitest';
import { checkpointKey } from '../../../server/handovers/checkpoint.ts';
import { verifyChain } from '../../../server/handovers/verifyChain.ts';
import { eraseGuests } from '../../../server/voyages/eraseGuests.ts';
import { useApp } from '../../support/app.ts';
import { at, type Boat, boats, day } from '../../support/boat.ts';
import type { Client } from '../../support/client.ts';

const app = useApp();
const world = boats(app);

const show = (client: Client, boat: Boat, guestId: string) =>
  client
    .post(`${boat.base}/handovers`, { guestId, networkId: boat.networks.guest.id, channel: 'screen' })
    .expect(201);
const holds = (boat: Boat) =>
  app.services.db.transaction({ kind: 'system' }, (tx) =>
    verifyChain(app.services.db, tx, boat.vesselId, {
      key: checkpointKey(app.services.config.logSigningSeed),
      outside: [],
    }),
  );
const nameOf = async (guestId: string) =>
  at(
    await world.rows<{ name: string | null; erased_at: Date | null }>(
      'SELECT name, erased_at FROM guests WHERE id = $id',
      { id: guestId },
    ),
    0,
  );

/** Every place of the database that holds this text: rows as JSON, table by table. */
async function placesOf(text: string): Promise<string[]> {
  const tables = await world.rows<{ name: string }>(
    "SELECT table_name AS name FROM information_schema.tables WHERE table_schema = 'public' AND table_type = 'BASE TABLE' AND table_name <> 'migrations'",
  );
  const found: string[] = [];
  for (const { name } of tables) {
    const hits = await world.rows(`SELECT 1 FROM ${name} t WHERE to_jsonb(t)::text LIKE $text LIMIT 1`, {
      text: `%${text}%`,
    });
    if (hits.length > 0) found.push(name);
  }
  return found;
}

describe('R49: a guest’s name is erased, what they were given stays', () => {
  test('on request, once they are ashore: gone from every table, the log’s line and chain stand', async () => {
    const boat = await world.boat();
    const captain = await boat.as('captain');
    const guestId = await world.guest(boat.vesselId, boat.partyId, { name: 'Odalys Wrenfield', position: 4 });
    await show(captain, boat, guestId);
    expect(await placesOf('Odalys Wrenfield')).toEqual(expect.arrayContaining(['guests', 'log_names']));
    const early = await captain.post(`${boat.base}/guests/${guestId}/erase`).expect(409);
    expect(early.body.detail).toContain('still expected or aboard');
    await captain.post(`${boat.base}/guests/${guestId}/ashore`).expect(200);
    const answer = await captain.post(`${boat.base}/guests/${guestId}/erase`).expect(200);
    expect(answer.body).toMatchObject({
      id: guestId,
      name: null,
      label: 'Guest 5',
      erasedAt: app.clock.now().toISOString(),
    });

    expect(await placesOf('Odalys Wrenfield')).toEqual([]);
    expect(await holds(boat)).toMatchObject({ bad: null });
    const { entries } = (await captain.get(`${boat.base}/log`).expect(200)).body;
    const shown = entries.find(({ kind }: { kind: string }) => kind === 'handover.screen');
    expect(shown.subject).toEqual({ kind: 'guest', id: guestId, name: null });
    const { networks } = (await captain.get(`${boat.base}/holders`).expect(200)).body;
    const guestNetwork = networks.find(({ audience }: { audience: string }) => audience === 'guest');
    expect(guestNetwork).toMatchObject({
      departed: 1,
      holders: [{ id: guestId, name: null, label: 'Guest 5' }],
    });
    await captain.post(`${boat.base}/guests/${guestId}/erase`).expect(410);
  });

  test('only by who may correct guests, of their own vessel', async () => {
    const boat = await world.boat();
    const other = await world.boat({ name: 'Corvina' });
    const guestId = await world.guest(boat.vesselId, boat.partyId, {
      name: 'Bastien Corriveau',
      from: day(app, -9),
      until: day(app, -2),
    });
    const erase = (client: Client, base = boat.base) => client.post(`${base}/guests/${guestId}/erase`);
    await erase(await boat.as('eto')).expect(403);
    await erase(await boat.as('crew')).expect(403);
    await erase(await other.as('captain')).expect(404);
    await erase(await other.as('captain'), other.base).expect(404);
    expect((await nameOf(guestId)).name).toBe('Bastien Corriveau');
    await erase(await boat.as('purser')).expect(200);
  });

  test('after the vessel’s retention, by the clock: that day and not the day before, and nobody else', async () => {
    const boat = await world.boat();
    await world.write('UPDATE vessels SET retention_days = 30 WHERE id = $v', { v: boat.vesselId });
    const longer = await world.boat({ name: 'Corvina' });
    const gone = (vesselId: string, name: string) =>
      world.guest(vesselId, null, { name, from: day(app, -9), until: day(app, -2) });
    const [due, kept] = [
      await gone(boat.vesselId, 'Ximena Aldecoa'),
      await gone(longer.vesselId, 'Petra Novakova'),
    ];
    const stays = await world.guest(boat.vesselId, boat.partyId, {
      name: 'Nils Abara',
      until: day(app, 60),
      position: 6,
    });

    app.clock.advance(28 * 86_400_000 - 1);
    await eraseGuests(app.services);
    expect((await nameOf(due)).name).toBe('Ximena Aldecoa');
    app.clock.advance(1);
    // Twice and on two servers at once is the same as once.
    await Promise.all([eraseGuests(app.services), eraseGuests(app.services)]);
    await eraseGuests(app.services);
    expect(await nameOf(due)).toMatchObject({ name: null });
    expect(await placesOf('Ximena Aldecoa')).toEqual([]);
    expect((await nameOf(kept)).name).toBe('Petra Novakova');
    expect((await nameOf(stays)).name).toBe('Nils Abara');
    const erased = await world.rows<{ body: object }>(
      "SELECT body FROM log_entries WHERE vessel_id = $v AND kind = 'guest.changed' AND body ? 'erased' ORDER BY seq",
      { v: boat.vesselId },
    );
    expect(erased).toHaveLength(1);
    expect(await holds(boat)).toMatchObject({ bad: null });
  });
});
