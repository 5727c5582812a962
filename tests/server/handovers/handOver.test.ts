import { randomUUID } from 'node:crypto';
import { describe, expect, test } from 'vitest';
import { useApp } from '../../support/app.ts';
import { factories } from '../../support/factories.ts';
import { aboard } from '../voyages/aboard.ts';

const app = useApp();
const make = factories(app);

/** A vessel with one guest aboard, one card printed for them, and how to hand over. */
async function ready() {
  const boat = await aboard(app, make);
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

describe('handing over', () => {
  test('writes the card, the receipt, the holder and the log in one transaction', async () => {
    const boat = await ready();
    const done = await boat.hand().expect(201);
    expect(done.body).toMatchObject({
      which: 'live',
      passphraseId: boat.network.passphraseId,
      already: false,
      sentence: `Card ${boat.card.serial} handed over.`,
    });
    expect(new Date(done.body.undoUntil).getTime() - new Date(done.body.at).getTime()).toBe(10_000);
    expect(await boat.state()).toEqual({ state: 'handed_over', handovers: 1, holders: 1, entries: 1 });
  });

  test('twice is once, and says so; two at the same moment are one', async () => {
    const boat = await ready();
    const stew = await boat.as('chief_stew');
    const both = await Promise.all([boat.hand(), boat.hand({ cardId: boat.card.id }, stew)]);
    expect(both.map(({ status }) => status)).toEqual([201, 201]);
    expect(both.map(({ body }) => body.already).sort()).toEqual([false, true]);
    expect(new Set(both.map(({ body }) => body.handoverId)).size).toBe(1);
    const third = await boat.hand().expect(201);
    expect(third.body).toMatchObject({
      already: true,
      sentence: 'This was handed over already; it is in the log once.',
    });
    expect(await boat.state()).toEqual({ state: 'handed_over', handovers: 1, holders: 1, entries: 1 });
  });

  test('eight at once through eight connections leave one', async () => {
    const boat = await ready();
    const all = await Promise.all(Array.from({ length: 8 }, () => boat.hand()));
    expect(all.filter(({ body }) => body.already === false)).toHaveLength(1);
    expect(await boat.state()).toEqual({ state: 'handed_over', handovers: 1, holders: 1, entries: 1 });
  });

  test('undo within ten seconds and the moment the request takes, not later', async () => {
    const boat = await ready();
    const at = app.clock.now();
    try {
      const first = await boat.hand().expect(201);
      app.clock.set(new Date(at.getTime() + 15_000));
      const undo = `${boat.base}/handovers/${first.body.handoverId}/undo`;
      await boat.purser.post(undo).expect(200);
      await boat.purser.post(undo).expect(200);
      expect(await boat.state()).toEqual({ state: 'printed', handovers: 0, holders: 0, entries: 2 });

      const second = await boat.hand().expect(201);
      expect(second.body.already).toBe(false);
      app.clock.advance(15_001);
      const late = await boat.purser
        .post(`${boat.base}/handovers/${second.body.handoverId}/undo`)
        .expect(409);
      expect(late.body.detail).toContain('too late');
      expect(await boat.state()).toMatchObject({ state: 'handed_over', handovers: 1, holders: 1 });
    } finally {
      app.clock.set(at);
    }
  });

  test('undoing the screen leaves what the card told', async () => {
    const boat = await ready();
    await boat.hand().expect(201);
    const screen = await boat.hand({ channel: 'screen' }).expect(201);
    expect(screen.body.sentence).toBe('Shown on screen and logged.');
    await boat.purser.post(`${boat.base}/handovers/${screen.body.handoverId}/undo`).expect(200);
    expect(await boat.state()).toMatchObject({ state: 'handed_over', handovers: 1, holders: 1 });
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

  test('refusals, each with what to do', async () => {
    const boat = await ready();
    const other = await boat.guest(boat.partyId, 'Ben Vela');
    const none = await boat.hand({ guestId: other }).expect(409);
    expect(none.body.detail).toBe(
      'No card is printed for them yet. Print one, or show the code on the screen.',
    );
    const theirs = await boat.hand({ guestId: other, cardId: boat.card.id }).expect(409);
    expect(theirs.body.detail).toContain('was printed for somebody else');
    const blank = await boat.printCard(null);
    await boat.hand({ cardId: blank.id }).expect(201);
    const taken = await boat.hand({ guestId: other, cardId: blank.id }).expect(409);
    expect(taken.body.detail).toContain('was handed to somebody else');
    await boat.run("UPDATE cards SET state = 'void' WHERE id = $id", { id: boat.card.id });
    await boat.hand({ cardId: boat.card.id }).expect(409);
    await boat.hand({ guestId: randomUUID() }).expect(404);
    await boat.hand({ networkId: randomUUID() }).expect(404);
    await boat.hand({ cardId: randomUUID() }).expect(404);
    const neither = await boat.hand({ guestId: undefined }).expect(422);
    expect(neither.body.errors).toEqual({ guestId: ['Say which guest or which crew member it is for'] });
    await boat.hand({ channel: 'mail' }).expect(422);
    await boat.purser.post(`${boat.base}/guests/${boat.guestId}/ashore`).expect(200);
    expect((await boat.hand({ channel: 'screen' }).expect(409)).body.detail).toContain('ashore');
    const bare = await make.network(boat.vesselId, { audience: 'guest', ssid: 'Without' });
    const empty = await boat.hand({ guestId: other, networkId: bare.id, channel: 'screen' }).expect(409);
    expect(empty.body.detail).toContain('type it in first');
  });

  test("each audience asks for its own right, and a network of another vessel is nobody's", async () => {
    const [boat, far] = [await ready(), await ready()];
    const crew = await make.network(boat.vesselId, {
      audience: 'crew',
      live: `crew-of-${boat.vesselId.slice(0, 13)}`,
    });
    const owner = await make.network(boat.vesselId, {
      audience: 'owner',
      live: `owner-of-${boat.vesselId.slice(0, 13)}`,
    });
    const crewMemberId = randomUUID();
    await boat.run(
      `INSERT INTO crew_members(id, vessel_id, name, position, signed_on_at, created_at, updated_at)
       VALUES ($id, $vessel, 'Tomas Reyes', 'Bosun', $now, $now, $now)`,
      { id: crewMemberId, vessel: boat.vesselId, now: app.clock.now() },
    );
    const give = async (role: 'purser' | 'chief_stew' | 'captain' | 'eto', networkId: string) =>
      (await boat.as(role)).post(`${boat.base}/handovers`, { crewMemberId, networkId, channel: 'screen' });
    expect((await give('purser', crew.id)).status).toBe(403);
    expect((await give('eto', crew.id)).status).toBe(403);
    expect((await give('chief_stew', owner.id)).status).toBe(403);
    expect((await give('chief_stew', crew.id)).status).toBe(201);
    expect((await give('captain', owner.id)).status).toBe(201);
    expect((await give('captain', far.network.id)).status).toBe(404);
    const captain = await boat.as('captain');
    const wrong = await boat.hand({ networkId: crew.id, channel: 'screen' }, captain).expect(422);
    expect(wrong.body.errors).toEqual({ networkId: ['The crew network is not for guests'] });
    const done = await far.hand().expect(201);
    await boat.purser.post(`${boat.base}/handovers/${done.body.handoverId}/undo`).expect(404);
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
