import { describe, expect, test } from 'vitest';
import { useApp } from '../../support/app.ts';
import { at, type Boat, boats, day } from '../../support/boat.ts';
import type { Client } from '../../support/client.ts';
import { readAsNewAndroid } from '../../support/wifiParser.ts';

const app = useApp();
const world = boats(app);

const preview = (
  client: Client,
  boat: Boat,
  body: object = {},
  audience: 'owner' | 'guest' | 'crew' = 'guest',
) => client.post(`${boat.base}/networks/${boat.networks[audience].id}/cards/preview`, body);
const print = (client: Client, boat: Boat, body: object, audience: 'owner' | 'guest' | 'crew' = 'guest') =>
  client
    .post(`${boat.base}/networks/${boat.networks[audience].id}/cards/print`, { format: 'wallet', ...body })
    .expect(200);
const cardIds = async (boat: Boat): Promise<string[]> =>
  (
    await world.rows<{ id: string }>('SELECT id FROM cards WHERE vessel_id = $v ORDER BY serial', {
      v: boat.vesselId,
    })
  ).map(({ id }) => id);
const logOf = (boat: Boat, kind: string) =>
  world.rows<{ subject_id: string; body: Record<string, unknown> }>(
    'SELECT subject_id, body FROM log_entries WHERE vessel_id = $v AND kind = $kind ORDER BY seq',
    { v: boat.vesselId, kind },
  );

describe('the card beside the list', () => {
  test('shows what the printed card will: code, words, language, valid-from line and serial', async () => {
    const boat = await world.boat();
    const purser = await boat.as('purser');
    const guest = at(boat.guests, 1);
    const first = (await preview(purser, boat, { guestId: guest.id }).expect(200)).body;
    expect(first).toMatchObject({
      ssid: 'Tamarisk guest',
      passphrase: boat.networks.guest.passphrase,
      language: 'it',
      validFrom: 'Valida da sab 13 giugno, ore 14:12',
      which: 'live',
      card: { id: null, serial: 'M-1001', printed: false },
      cautionDock: true,
    });
    expect(first.parts.join('')).toBe(boat.networks.guest.passphrase);
    expect(readAsNewAndroid(first.payload)).toMatchObject({
      ssid: 'Tamarisk guest',
      password: boat.networks.guest.passphrase,
    });

    await print(purser, boat, { blanks: 1 });
    await print(purser, boat, { guestIds: [guest.id] });
    const [blank, theirs] = await cardIds(boat);
    const card = async (body: object) => (await preview(purser, boat, body).expect(200)).body.card;
    expect(await card({ guestId: guest.id })).toEqual({ id: theirs, serial: 'M-1002', printed: true });
    expect(await card({ guestId: at(boat.guests, 0).id })).toEqual({
      id: blank,
      serial: 'M-1001',
      printed: true,
    });
    expect((await preview(purser, boat, { guestId: guest.id, language: 'de' })).body.validFrom).toContain(
      'Gültig ab',
    );
    // Greek has no card, so English stands in.
    expect((await preview(purser, boat, { guestId: at(boat.guests, 2).id })).body.language).toBe('en');
  });

  test('R13, house habit 7: looking is in the log once a session and passphrase, not once a tap', async () => {
    const boat = await world.boat();
    const purser = await boat.as('purser', 'Ines Okafor-Lund');
    for (const guest of boat.guests) await preview(purser, boat, { guestId: guest.id }).expect(200);
    expect(await logOf(boat, 'passphrase.revealed')).toHaveLength(1);
    await preview(await boat.as('chief_stew'), boat).expect(200);
    expect(await logOf(boat, 'passphrase.revealed')).toHaveLength(2);
    await world.staged(
      boat.vesselId,
      boat.networks.guest.id,
      `staged-marker-${boat.vesselId.slice(0, 8)}`,
      day(app, 1),
    );
    const staged = await preview(purser, boat, { which: 'staged' }).expect(200);
    expect(staged.body).toMatchObject({ which: 'staged', validFrom: 'From Mon 15 June, 14:12' });
    expect(await logOf(boat, 'passphrase.revealed')).toHaveLength(3);
    const holders = await world.rows('SELECT 1 FROM holders WHERE vessel_id = $v', { v: boat.vesselId });
    expect(holders).toHaveLength(3);
  });

  test('is refused to those who may not print, and for what is not this vessel’s (R15)', async () => {
    const boat = await world.boat();
    const other = await world.boat({ name: 'Corvina' });
    const purser = await boat.as('purser');
    await preview(await boat.as('eto'), boat).expect(403);
    await preview(await boat.as('crew'), boat).expect(403);
    await preview(purser, boat, {}, 'owner').expect(403);
    await preview(await other.as('captain'), boat).expect(404);
    await preview(purser, boat, { guestId: at(other.guests, 0).id }).expect(404);
    await preview(purser, boat, { which: 'staged' }).expect(409);
    const wrong = await preview(purser, boat, { language: 'el' }).expect(422);
    expect(Object.keys(wrong.body.errors)).toEqual(['language']);
    await preview(await boat.as('owner_keeper'), boat, {}, 'owner').expect(200);
  });
});

describe('the large code', () => {
  const show = (client: Client, boat: Boat, guestId: string) =>
    client.post(`${boat.base}/networks/${boat.networks.guest.id}/guests/${guestId}/show`);

  test('is a handover: in the log, the guest holds it, a second showing is a second line but one handover', async () => {
    const boat = await world.boat();
    const purser = await boat.as('purser');
    const guest = at(boat.guests, 1);
    const shown = (await show(purser, boat, guest.id).expect(200)).body;
    expect(shown.parts.join('')).toBe(boat.networks.guest.passphrase);
    expect(shown).toMatchObject({ language: 'it', which: 'live', underWay: false, cautionDock: true });
    expect(Date.parse(shown.undoUntil) - Date.parse(shown.at)).toBe(10_000);
    const again = (await show(purser, boat, guest.id).expect(200)).body;
    expect(again.handoverId).toBe(shown.handoverId);
    expect((await logOf(boat, 'handover.screen')).map((entry) => entry.subject_id)).toEqual([
      guest.id,
      guest.id,
    ]);
    const holders = await world.rows(
      'SELECT holder_kind, holder_id, through FROM holders WHERE vessel_id = $v',
      {
        v: boat.vesselId,
      },
    );
    expect(holders).toEqual([{ holder_kind: 'guest', holder_id: guest.id, through: 'screen' }]);
  });

  test('is refused to those who may not hand out, and for another vessel’s guest', async () => {
    const boat = await world.boat();
    const other = await world.boat({ name: 'Corvina' });
    await show(await boat.as('eto'), boat, at(boat.guests, 0).id).expect(403);
    await show(await boat.as('purser'), boat, at(other.guests, 0).id).expect(404);
    await show(await other.as('captain'), boat, at(boat.guests, 0).id).expect(404);
    expect(await logOf(boat, 'handover.screen')).toEqual([]);
  });
});

describe('what becomes of cards', () => {
  const settle = (client: Client, boat: Boat, id: string | undefined, what: 'void' | 'returned' | 'lost') =>
    client.post(`${boat.base}/cards/${id}/${what}`);

  test('a lost card exposes its network and moves the change up; found again it is returned, the leak stays', async () => {
    const boat = await world.boat();
    const purser = await boat.as('purser');
    await print(purser, boat, { blanks: 2 });
    const [lost, kept] = await cardIds(boat);
    await settle(purser, boat, lost, 'returned').expect(409);
    const answer = (await settle(purser, boat, lost, 'lost').expect(200)).body;
    expect(answer.card).toMatchObject({ serial: 'M-1001', state: 'lost', carries: 'live' });
    const [planned] = await world.rows<{ due_at: Date; reasons: { code: string }[] }>(
      "SELECT due_at, reasons FROM rotations WHERE network_id = $n AND state = 'planned'",
      { n: boat.networks.guest.id },
    );
    expect(planned?.due_at.toISOString()).toBe(answer.changeAt);
    expect(planned?.reasons.map(({ code }) => code)).toContain('lost_card');
    const leaks = await world.rows('SELECT kind, card_id, passphrase_id FROM leaks WHERE vessel_id = $v', {
      v: boat.vesselId,
    });
    expect(leaks).toEqual([
      { kind: 'lost_card', card_id: lost, passphrase_id: boat.networks.guest.passphraseId },
    ]);
    expect(await logOf(boat, 'card.lost')).toHaveLength(1);

    const twice = await settle(purser, boat, lost, 'lost').expect(409);
    expect(twice.body.detail).toBe('Card M-1001 is marked lost already. Look at the list again.');
    expect((await settle(purser, boat, lost, 'returned').expect(200)).body.state).toBe('returned');
    expect(
      await world.rows('SELECT 1 FROM leaks WHERE vessel_id = $v AND withdrawn_at IS NULL', {
        v: boat.vesselId,
      }),
    ).toHaveLength(1);
    expect((await settle(purser, boat, kept, 'void').expect(200)).body.state).toBe('void');
    await settle(purser, boat, kept, 'void').expect(409);
  });

  test('a lost card of a retired passphrase is no leak', async () => {
    const boat = await world.boat();
    const purser = await boat.as('purser');
    await print(purser, boat, { blanks: 1 });
    await world.write('UPDATE passphrases SET retired_at = $now WHERE id = $id', {
      id: boat.networks.guest.passphraseId,
      now: app.clock.now(),
    });
    const answer = (await settle(purser, boat, at(await cardIds(boat), 0), 'lost').expect(200)).body;
    expect(answer).toMatchObject({ changeAt: null, card: { carries: 'retired' } });
    expect(await world.rows('SELECT 1 FROM leaks WHERE vessel_id = $v', { v: boat.vesselId })).toEqual([]);
  });

  test('only who may hand out or print that network, on that vessel (R15)', async () => {
    const boat = await world.boat();
    const other = await world.boat({ name: 'Corvina' });
    await print(await boat.as('captain'), boat, { blanks: 1 }, 'crew');
    const [id] = await cardIds(boat);
    for (const what of ['void', 'lost', 'returned'] as const) {
      await settle(await boat.as('purser'), boat, id, what).expect(403);
      await settle(await boat.as('eto'), boat, id, what).expect(403);
      const foreign = await other.as('captain');
      await settle(foreign, boat, id, what).expect(404);
      await settle(foreign, other, id, what).expect(404);
    }
    await settle(await boat.as('chief_stew'), boat, id, 'lost').expect(200);
  });
});

describe('the list of cards', () => {
  test('R36: pages by key, by state and network, with cursors that are signed and bound to the vessel', async () => {
    const boat = await world.boat();
    const other = await world.boat({ name: 'Corvina' });
    const captain = await boat.as('captain');
    await print(captain, boat, { blanks: 5 });
    await print(captain, boat, { blanks: 2 }, 'crew');
    const list = (query: string, client = captain, base = boat.base) => client.get(`${base}/cards?${query}`);
    const seen: string[] = [];
    for (let after: string | null = ''; after !== null; ) {
      const answer: { body: { cards: { serial: string }[]; after: string | null } } = await list(
        `limit=3${after ? `&after=${after}` : ''}`,
      ).expect(200);
      seen.push(...answer.body.cards.map(({ serial }) => serial));
      after = answer.body.after;
    }
    expect([...seen].sort()).toEqual(Array.from({ length: 7 }, (_one, index) => `M-${1001 + index}`));

    const page = (await list('limit=2').expect(200)).body;
    expect(page.counts).toEqual({ printed: 7, handed_over: 0, returned: 0, lost: 0, void: 0 });
    await list(`limit=2&after=${page.after}x`).expect(400);
    await list('after=bm90aGluZw.c2lnbmF0dXJl').expect(400);
    await list(`limit=2&after=${page.after}`, await other.as('captain'), other.base).expect(400);
    for (const query of ['limit=0', 'limit=101', 'limit=-1', 'limit=abc', 'state=burnt', 'sort=password'])
      await list(query).expect(422);
    expect((await list(`networkId=${boat.networks.crew.id}`).expect(200)).body.cards).toHaveLength(2);
    expect((await list('state=void').expect(200)).body.cards).toEqual([]);

    // The purser prints for guests only, and sees those cards only.
    const purser = (await list('', await boat.as('purser')).expect(200)).body;
    expect(new Set(purser.cards.map((card: { audience: string }) => card.audience))).toEqual(
      new Set(['guest']),
    );
    expect(purser.counts.printed).toBe(5);
    await list('', await boat.as('eto')).expect(403);
    await list('', await other.as('captain')).expect(404);
  });

  test('says whose a card is: for whom it was printed, then who was given it', async () => {
    const boat = await world.boat();
    const purser = await boat.as('purser');
    await print(purser, boat, { guestIds: [at(boat.guests, 2).id] });
    await print(purser, boat, { blanks: 1 });
    const [, blank] = await cardIds(boat);
    await purser
      .post(`${boat.base}/handovers`, {
        guestId: at(boat.guests, 0).id,
        networkId: boat.networks.guest.id,
        channel: 'card',
        cardId: blank,
      })
      .expect(201);
    const { cards } = (await purser.get(`${boat.base}/cards`).expect(200)).body;
    const people = Object.fromEntries(
      cards.map((card: { serial: string; state: string; person: { name: string } | null }) => [
        card.serial,
        [card.state, card.person?.name],
      ]),
    );
    expect(people).toEqual({
      'M-1001': ['printed', 'Guest 3'],
      'M-1002': ['handed_over', 'Sigrun Brandvold'],
    });
  });
});
