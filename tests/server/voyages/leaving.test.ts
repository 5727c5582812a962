import { describe, expect, test } from 'vitest';
import { useApp } from '../../support/app.ts';
import { charterBoat } from '../../support/charterBoat.ts';
import { factories } from '../../support/factories.ts';

const app = useApp();
const make = factories(app);

/** A vessel with one guest aboard, one card printed for them, and how to hand over. */
async function ready() {
  const boat = await charterBoat(app, make);
  const partyId = await boat.party();
  const guestId = await boat.guest(partyId);
  const card = await boat.printCard(guestId);
  const hand = (body: object = {}, client = boat.purser) =>
    client.post(`${boat.base}/handovers`, { guestId, networkId: boat.network.id, channel: 'card', ...body });
  const state = async () =>
    (
      await boat.rows(
        `SELECT k.state, (SELECT count(*)::int FROM handovers h WHERE h.vessel_id = $vessel AND undone_at IS NULL) AS handovers,
           (SELECT count(*)::int FROM holders o WHERE o.vessel_id = $vessel) AS holders,
           (SELECT count(*)::int FROM log_entries e WHERE e.vessel_id = $vessel AND e.kind LIKE 'handover.%') AS entries
         FROM cards k WHERE k.id = $card`,
        { card: card.id },
      )
    )[0];
  return { ...boat, partyId, guestId, card, hand, state };
}

/** A change whose passphrase is made and that is due in `hours`. */
async function staged(boat: Awaited<ReturnType<typeof ready>>, hours: number): Promise<string> {
  const captain = await boat.as('captain');
  await captain
    .post(`${boat.base}/networks/${boat.network.id}/rotations/now`, { reason: 'routine' })
    .expect(201);
  const dueAt = new Date(app.clock.now().getTime() + hours * 3_600_000);
  await boat.run("UPDATE rotations SET due_at = $dueAt WHERE network_id = $network AND state = 'staged'", {
    dueAt,
    network: boat.network.id,
  });
  const [row] = await boat.rows<{ id: string }>(
    "SELECT to_passphrase_id AS id FROM rotations WHERE network_id = $network AND state = 'staged'",
    { network: boat.network.id },
  );
  if (!row) throw new Error('nothing staged');
  return row.id;
}

describe('arriving', () => {
  test('eight at once through eight connections leave one', async () => {
    const boat = await ready();
    const all = await Promise.all(Array.from({ length: 8 }, () => boat.hand()));
    expect(all.filter(({ body }) => body.already === false)).toHaveLength(1);
    expect(await boat.state()).toEqual({ state: 'handed_over', handovers: 1, holders: 1, entries: 1 });
  });

  test('who comes aboard after the staged change gets the passphrase to come, others the one in force', async () => {
    const boat = await ready();
    const next = await staged(boat, 24);
    const later = await boat.guest(boat.partyId, 'Ben Vela', { fromAt: boat.hours(25) });
    const old = await boat.printCard(later);
    const now = await boat.hand({ guestId: later, cardId: old.id }).expect(409);
    expect(now.body.detail).toContain('Print a new one');
    const fresh = await boat.printCard(later, next);
    const seen = await boat.purser.get(`${boat.base}/arrivals`).expect(200);
    expect(seen.body.network.staged).toEqual({ passphraseId: next, from: boat.hours(24) });
    expect(seen.body.guests).toMatchObject([{ printedCard: boat.card }, { printedCard: fresh }]);
    expect((await boat.hand({ guestId: later }).expect(201)).body).toMatchObject({
      which: 'staged',
      passphraseId: next,
    });
    expect((await boat.hand().expect(201)).body).toMatchObject({ which: 'live' });
  });
});

describe('leaving', () => {
  test('a guest who leaves exposes the network and the change moves up; back aboard it is in order again', async () => {
    const boat = await ready();
    await boat.hand().expect(201);
    const gone = await boat.purser.post(`${boat.base}/guests/${boat.guestId}/ashore`).expect(200);
    expect(gone.body.ashoreAt).toBe(app.clock.now().toISOString());
    const stew = await boat.as('chief_stew');
    const seen = await stew.get(`${boat.base}/holders`).expect(200);
    expect(seen.body.networks).toMatchObject([
      { id: boat.network.id, departed: 1, leaks: [], holders: [{ name: 'Anna Brandt', through: 'card' }] },
    ]);
    const plan = await boat.rows<{ reasons: { code: string }[] }>(
      "SELECT reasons FROM rotations WHERE network_id = $network AND state = 'planned'",
      { network: boat.network.id },
    );
    expect(plan[0]?.reasons.map(({ code }) => code)).toContain('departed_guest');
    await boat.purser.post(`${boat.base}/guests/${boat.guestId}/back`).expect(200);
    expect((await stew.get(`${boat.base}/holders`).expect(200)).body.networks[0].departed).toBe(0);
    expect(await boat.kinds()).toEqual(expect.arrayContaining(['guest.ashore', 'guest.back']));
  });

  test('a party leaves with one card missing: a leak, and a change', async () => {
    const boat = await ready();
    const other = await boat.guest(boat.partyId, 'Ben Vela');
    const lost = await boat.printCard(other);
    await boat.hand().expect(201);
    await boat.hand({ guestId: other }).expect(201);
    const far = await ready();
    const path = `${boat.base}/parties/${boat.partyId}/ashore`;
    const wrong = await boat.purser
      .post(path, { cards: [{ cardId: far.card.id, state: 'lost' }] })
      .expect(422);
    expect(wrong.body.errors).toEqual({ 'cards.0.cardId': ['This card was not for anybody of this party'] });
    const left = await boat.purser
      .post(path, {
        cards: [
          { cardId: boat.card.id, state: 'returned' },
          { cardId: lost.id, state: 'lost' },
        ],
      })
      .expect(200);
    expect(left.body).toMatchObject({
      party: { ashoreAt: app.clock.now().toISOString() },
      lostCards: 1,
      exposed: [{ networkId: boat.network.id }],
    });
    expect(left.body.exposed[0].changeAt).not.toBeNull();
    await boat.purser.post(path).expect(409);
    expect(
      await boat.rows('SELECT serial, state FROM cards WHERE vessel_id = $vessel ORDER BY serial'),
    ).toEqual([
      { serial: boat.card.serial, state: 'returned' },
      { serial: lost.serial, state: 'lost' },
    ]);
    expect(await boat.rows('SELECT kind, card_id FROM leaks WHERE vessel_id = $vessel')).toEqual([
      { kind: 'lost_card', card_id: lost.id },
    ]);
    expect(
      await boat.rows(
        'SELECT count(*)::int AS gone FROM holders WHERE vessel_id = $vessel AND departed_at IS NOT NULL',
      ),
    ).toEqual([{ gone: 2 }]);
    await boat.purser.post(`${boat.base}/guests`, { partyId: boat.partyId, name: 'Late' }).expect(422);
  });
});
