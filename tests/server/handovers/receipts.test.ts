import { randomUUID } from 'node:crypto';
import { describe, expect, test } from 'vitest';
import { useApp } from '../../support/app.ts';
import { at, type Boat, boats, day } from '../../support/boat.ts';
import { anonymousClient, type Client } from '../../support/client.ts';

const app = useApp();
const world = boats(app);

const handOver = (client: Client, boat: Boat, body: object) =>
  client.post(`${boat.base}/handovers`, { networkId: boat.networks.guest.id, channel: 'card', ...body });
const print = (client: Client, boat: Boat, body: object, audience: 'owner' | 'guest' | 'crew' = 'guest') =>
  client
    .post(`${boat.base}/networks/${boat.networks[audience].id}/cards/print`, { format: 'wallet', ...body })
    .expect(200);
const cards = (boat: Boat) =>
  world.rows<{ id: string; serial: string; state: string; guest_id: string | null }>(
    'SELECT id, serial, state, guest_id FROM cards WHERE vessel_id = $v ORDER BY serial',
    { v: boat.vesselId },
  );
const holders = (boat: Boat) =>
  world.rows<{ holder_id: string; through: string }>(
    "SELECT holder_id, through FROM holders WHERE vessel_id = $v AND holder_kind <> 'person' ORDER BY since, holder_id",
    { v: boat.vesselId },
  );
const logOf = (boat: Boat, kind: string) =>
  world.rows<{ subject_id: string; name: string | null; body: Record<string, unknown> }>(
    `SELECT e.subject_id, n.name, e.body FROM log_entries e LEFT JOIN log_names n ON n.entry_id = e.id AND n.role = 'subject'
     WHERE e.vessel_id = $v AND e.kind = $kind ORDER BY e.seq`,
    { v: boat.vesselId, kind },
  );

describe('handing over a printed card', () => {
  test('one transaction tells the whole story: card, receipt, holder, log with the name, and the screen', async () => {
    const boat = await world.boat();
    const purser = await boat.as('purser', 'Ines Okafor-Lund');
    const guest = at(boat.guests, 1);
    await print(purser, boat, { guestIds: [guest.id] });
    const answer = (await handOver(purser, boat, { guestId: guest.id }).expect(201)).body;
    expect(answer).toMatchObject({
      which: 'live',
      already: false,
      passphraseId: boat.networks.guest.passphraseId,
      sentence: 'Card M-1001 handed over.',
    });
    expect(Date.parse(answer.undoUntil) - Date.parse(answer.at)).toBe(10_000);
    expect(await cards(boat)).toMatchObject([{ serial: 'M-1001', state: 'handed_over' }]);
    expect(await holders(boat)).toEqual([{ holder_id: guest.id, through: 'card' }]);
    expect(await logOf(boat, 'handover.card')).toMatchObject([
      { subject_id: guest.id, name: 'Matteo Quaranta', body: { serial: 'M-1001' } },
    ]);
    const screen = (await purser.get(`${boat.base}/arrivals`).expect(200)).body;
    const shown = screen.guests.find((one: { id: string }) => one.id === guest.id);
    expect(shown.handover).toMatchObject({ id: answer.handoverId, channel: 'card', serial: 'M-1001' });
    expect(screen.guests.filter((one: { handover: object | null }) => one.handover !== null)).toHaveLength(1);
  });

  test('two people at once leave one handover, and the second is told so', async () => {
    const boat = await world.boat();
    const guest = at(boat.guests, 0);
    const clients = [await boat.as('purser'), await boat.as('chief_stew')];
    await print(at(clients, 0), boat, { guestIds: [guest.id] });
    const answers = await Promise.all(
      clients.map((client) => handOver(client, boat, { guestId: guest.id }).expect(201)),
    );
    expect(answers.map(({ body }) => body.already).sort()).toEqual([false, true]);
    expect(answers.find(({ body }) => body.already)?.body.sentence).toBe(
      'This was handed over already; it is in the log once.',
    );
    expect(new Set(answers.map(({ body }) => body.handoverId)).size).toBe(1);
    expect(await logOf(boat, 'handover.card')).toHaveLength(1);
    expect(await holders(boat)).toHaveLength(1);
  });

  test('one blank in two hands at once goes to one guest only', async () => {
    const boat = await world.boat();
    const clients = [await boat.as('purser'), await boat.as('chief_stew')];
    await print(at(clients, 0), boat, { blanks: 1 });
    const cardId = at(await cards(boat), 0).id;
    const answers = await Promise.all(
      clients.map((client, index) => handOver(client, boat, { guestId: at(boat.guests, index).id, cardId })),
    );
    expect(answers.map(({ status }) => status).sort()).toEqual([201, 409]);
    expect(answers.find(({ status }) => status === 409)?.body.detail).toBe(
      'Card M-1001 was handed to somebody else. Print another.',
    );
    expect(await holders(boat)).toHaveLength(1);
  });

  test('the same request again, by its key, is the same handover', async () => {
    const boat = await world.boat();
    const purser = await boat.as('purser');
    await print(purser, boat, { guestIds: [at(boat.guests, 0).id] });
    const key = randomUUID();
    const send = () => handOver(purser, boat, { guestId: at(boat.guests, 0).id }).set('Idempotency-Key', key);
    const first = await send().expect(201);
    const second = await send().expect(201);
    expect(second.body).toEqual(first.body);
    expect(await logOf(boat, 'handover.card')).toHaveLength(1);
  });

  test('who comes after the change gets the next passphrase, and not today’s card', async () => {
    const boat = await world.boat();
    const purser = await boat.as('purser');
    const { id } = boat.networks.guest;
    await print(purser, boat, { blanks: 1 });
    const today = at(await cards(boat), 0).id;
    const next = await world.staged(
      boat.vesselId,
      id,
      `staged-marker-${boat.vesselId.slice(0, 8)}`,
      day(app, 6, 1),
    );
    const partyId = await world.party(boat.vesselId, day(app, 6, 5), day(app, 13), 'Abara party');
    const guestId = await world.guest(boat.vesselId, partyId, {
      name: 'Runa Abara',
      from: day(app, 6, 5),
      until: day(app, 13),
    });
    const wrong = await handOver(purser, boat, { guestId, cardId: today }).expect(409);
    expect(wrong.body.detail).toContain('the change comes between');
    await print(purser, boat, { guestIds: [guestId] });
    const right = (await handOver(purser, boat, { guestId }).expect(201)).body;
    expect(right).toMatchObject({ which: 'staged', passphraseId: next });
    // The innocent neighbour aboard now keeps today's.
    const now = (await handOver(purser, boat, { guestId: at(boat.guests, 0).id, cardId: today }).expect(201))
      .body;
    expect(now).toMatchObject({ which: 'live', passphraseId: boat.networks.guest.passphraseId });
  });

  test('without a printed card it says what to do, and writes nothing', async () => {
    const boat = await world.boat();
    const purser = await boat.as('purser');
    const none = await handOver(purser, boat, { guestId: at(boat.guests, 0).id }).expect(409);
    expect(none.body.detail).toBe(
      'No card is printed for them yet. Print one, or show the code on the screen.',
    );
    await print(purser, boat, { guestIds: [at(boat.guests, 1).id] });
    const theirs = at(await cards(boat), 0).id;
    const other = await handOver(purser, boat, { guestId: at(boat.guests, 0).id, cardId: theirs }).expect(
      409,
    );
    expect(other.body.detail).toContain('was printed for somebody else');
    await purser.post(`${boat.base}/cards/${theirs}/void`).expect(200);
    const gone = await handOver(purser, boat, { guestId: at(boat.guests, 1).id, cardId: theirs }).expect(409);
    expect(gone.body.detail).toBe('Card M-1001 no longer counts. Print a new one.');
    expect(await holders(boat)).toEqual([]);
    expect(await logOf(boat, 'handover.card')).toEqual([]);
  });

  test('R14, R15: each audience by its own roles, and nobody else’s vessel, guest, network or card', async () => {
    const boat = await world.boat();
    const other = await world.boat({ name: 'Corvina' });
    const captain = await boat.as('captain');
    await print(captain, boat, { blanks: 1 });
    await print(await other.as('captain'), other, { blanks: 1 });
    const guestId = at(boat.guests, 0).id;
    const foreignCard = at(await cards(other), 0).id;
    await handOver(anonymousClient(app), boat, { guestId }).expect(401);
    await handOver(await boat.as('eto'), boat, { guestId, channel: 'screen' }).expect(403);
    await handOver(await boat.as('crew'), boat, { guestId, channel: 'screen' }).expect(403);
    await handOver(await other.as('captain'), boat, { guestId, channel: 'screen' }).expect(404);
    const purser = await boat.as('purser');
    const crew = { crewMemberId: boat.crewMemberId, networkId: boat.networks.crew.id, channel: 'screen' };
    await handOver(purser, boat, crew).expect(403);
    await handOver(purser, boat, { guestId, networkId: boat.networks.owner.id, channel: 'screen' }).expect(
      403,
    );
    await handOver(purser, boat, { guestId: at(other.guests, 0).id, channel: 'screen' }).expect(404);
    await handOver(purser, boat, { guestId, networkId: other.networks.guest.id, channel: 'screen' }).expect(
      404,
    );
    await handOver(purser, boat, { guestId, cardId: foreignCard }).expect(404);
    expect(await holders(boat)).toEqual([]);
    expect((await cards(other)).map(({ state }) => state)).toEqual(['printed']);

    await handOver(await boat.as('chief_stew'), boat, crew).expect(201);
    await handOver(await boat.as('owner_keeper'), boat, {
      guestId,
      networkId: boat.networks.owner.id,
      channel: 'screen',
    }).expect(201);
    expect(await holders(boat)).toHaveLength(2);
  });

  test('every wrong field is named', async () => {
    const boat = await world.boat();
    const purser = await boat.as('purser');
    const wrong = await purser
      .post(`${boat.base}/handovers`, { guestId: 'x', networkId: 7, channel: 'pigeon', extra: 1 })
      .expect(422);
    expect(Object.keys(wrong.body.errors).sort()).toEqual(['channel', 'extra', 'guestId', 'networkId']);
    await handOver(purser, boat, {}).expect(422);
    await handOver(purser, boat, { guestId: at(boat.guests, 0).id, crewMemberId: boat.crewMemberId }).expect(
      422,
    );
    await handOver(purser, boat, {
      guestId: at(boat.guests, 0).id,
      networkId: boat.networks.crew.id,
      channel: 'screen',
    }).expect(403);
  });
});

describe('undo', () => {
  const undo = (client: Client, boat: Boat, id: string) => client.post(`${boat.base}/handovers/${id}/undo`);

  test('puts card, holder and screen back as they were, and says so in the log', async () => {
    const boat = await world.boat();
    const purser = await boat.as('purser');
    const guest = at(boat.guests, 0);
    await print(purser, boat, { guestIds: [guest.id] });
    const { handoverId } = (await handOver(purser, boat, { guestId: guest.id }).expect(201)).body;
    await undo(purser, boat, handoverId).expect(200);
    expect(await cards(boat)).toMatchObject([{ state: 'printed', guest_id: guest.id }]);
    expect(await holders(boat)).toEqual([]);
    expect(await logOf(boat, 'handover.undone')).toMatchObject([
      { subject_id: guest.id, body: { serial: 'M-1001' } },
    ]);
    await undo(purser, boat, handoverId).expect(200);
    expect(await logOf(boat, 'handover.undone')).toHaveLength(1);
    // And it can be done again, as if nothing had been.
    const again = (await handOver(purser, boat, { guestId: guest.id }).expect(201)).body;
    expect(again.already).toBe(false);
    expect(again.handoverId).not.toBe(handoverId);
  });

  test('a guest who was shown the code as well still holds it', async () => {
    const boat = await world.boat();
    const purser = await boat.as('purser');
    const guest = at(boat.guests, 0);
    await handOver(purser, boat, { guestId: guest.id, channel: 'screen' }).expect(201);
    await print(purser, boat, { guestIds: [guest.id] });
    const { handoverId } = (await handOver(purser, boat, { guestId: guest.id }).expect(201)).body;
    await undo(purser, boat, handoverId).expect(200);
    expect(await holders(boat)).toEqual([{ holder_id: guest.id, through: 'screen' }]);
  });

  test('15 seconds are taken, 16 are too late; only by who may hand over, only on that vessel', async () => {
    const boat = await world.boat();
    const other = await world.boat({ name: 'Corvina' });
    const purser = await boat.as('purser');
    const give = async (index: number): Promise<string> =>
      (await handOver(purser, boat, { guestId: at(boat.guests, index).id, channel: 'screen' }).expect(201))
        .body.handoverId;
    const first = await give(0);
    await undo(await boat.as('eto'), boat, first).expect(403);
    await undo(await other.as('captain'), boat, first).expect(404);
    await undo(await other.as('captain'), other, first).expect(404);
    await undo(purser, boat, randomUUID()).expect(404);
    app.clock.advance(15_000);
    await undo(purser, boat, first).expect(200);
    const second = await give(1);
    app.clock.advance(15_001);
    const late = await undo(purser, boat, second).expect(409);
    expect(late.body.detail).toContain('too late');
    expect(await holders(boat)).toHaveLength(1);
  });
});

describe('who holds what', () => {
  test('current and departed of each network, through what and since when; the owner’s only as a count to others', async () => {
    const boat = await world.boat();
    const captain = await boat.as('captain');
    const purser = await boat.as('purser');
    const guest = at(boat.guests, 0);
    await handOver(purser, boat, { guestId: guest.id, channel: 'screen' }).expect(201);
    await handOver(captain, boat, {
      guestId: at(boat.guests, 1).id,
      networkId: boat.networks.owner.id,
      channel: 'screen',
    }).expect(201);
    await purser.post(`${boat.base}/guests/${guest.id}/ashore`).expect(200);
    type Network = {
      audience: string;
      current: number;
      departed: number;
      holders: { name: string }[] | null;
    };
    const read = async (client: Client): Promise<Record<string, Network>> => {
      const { networks } = (await client.get(`${boat.base}/holders`).expect(200)).body;
      return Object.fromEntries(networks.map((one: Network) => [one.audience, one]));
    };
    const seen = await read(captain);
    expect(seen.guest).toMatchObject({
      current: 0,
      departed: 1,
      holders: [{ name: 'Sigrun Brandvold', through: 'screen', departedAt: app.clock.now().toISOString() }],
    });
    expect(seen.owner).toMatchObject({ current: 1, departed: 0, holders: [{ name: 'Matteo Quaranta' }] });
    expect((await read(purser)).owner).toMatchObject({ current: 1, departed: 0, holders: null });
    expect((await read(purser)).guest?.holders).toHaveLength(1);
    await (await boat.as('eto')).get(`${boat.base}/holders`).expect(403);
  });
});
