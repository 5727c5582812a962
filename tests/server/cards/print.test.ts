import { describe, expect, test } from 'vitest';
import { useApp } from '../../support/app.ts';
import { at, type Boat, boats, day } from '../../support/boat.ts';
import { anonymousClient, Client } from '../../support/client.ts';
import { decodePdf, pdfText } from '../../support/decode.ts';
import { factories } from '../../support/factories.ts';
import { readAsNewAndroid, readAsZxing } from '../../support/wifiParser.ts';

const app = useApp();
const make = factories(app);
const world = boats(app);

const pdf = (response: { body: unknown }): Buffer => {
  if (!Buffer.isBuffer(response.body)) throw new Error('no file was answered');
  return response.body;
};
const cardsOf = (boat: Boat) =>
  world.rows<{
    serial: string;
    state: string;
    language: string;
    guest_id: string | null;
    passphrase_id: string;
  }>(
    'SELECT serial, state, language, guest_id, passphrase_id FROM cards WHERE vessel_id = $v ORDER BY serial',
    { v: boat.vesselId },
  );
const kindsOf = async (boat: Boat) =>
  (
    await world.rows<{ kind: string }>('SELECT kind FROM log_entries WHERE vessel_id = $v ORDER BY seq', {
      v: boat.vesselId,
    })
  ).map(({ kind }) => kind);

describe('printing join cards', () => {
  test('a sheet for the party: every code read back by zbarimg is the network in force, each in its language', async () => {
    const boat = await world.boat();
    const purser = await boat.as('purser');
    const { id, passphrase } = boat.networks.guest;
    const guestIds = boat.guests.map((guest) => guest.id);

    const answer = await purser
      .post(`${boat.base}/networks/${id}/cards/print`, { guestIds, format: 'wallet-sheet' })
      .expect(200);
    expect(answer.headers['content-type']).toBe('application/pdf');
    expect(answer.headers['content-disposition']).toMatch(
      /^attachment; filename="Cards M-1001 to M-1003\.pdf"$/,
    );
    expect(answer.headers['cache-control']).toBe('no-store');
    expect(answer.headers['x-content-type-options']).toBe('nosniff');
    expect(answer.headers['cross-origin-resource-policy']).toBe('same-origin');

    const payloads = await decodePdf(pdf(answer));
    expect(payloads).toHaveLength(3);
    for (const payload of payloads) {
      for (const read of [readAsNewAndroid(payload), readAsZxing(payload)]) {
        expect(read).toMatchObject({ ssid: 'Tamarisk guest', password: passphrase });
      }
    }
    const text = await pdfText(pdf(answer));
    for (const words of ['M-1001', 'M-1003', 'Rete', 'Network', 'Matteo Quaranta'])
      expect(text).toContain(words);
    // Lying in Split, UTC+2 in June: the passphrase came into force on Saturday 13 June, 14:12 ship's time.
    expect(text).toContain('Valida da sab 13 giugno, ore 14:12');

    expect(await cardsOf(boat)).toMatchObject([
      { serial: 'M-1001', state: 'printed', language: 'en', guest_id: guestIds[0] },
      { serial: 'M-1002', state: 'printed', language: 'it', guest_id: guestIds[1] },
      // No card is printed in Greek.
      { serial: 'M-1003', state: 'printed', language: 'en', guest_id: guestIds[2] },
    ]);
    expect(await kindsOf(boat)).toEqual(['card.printed', 'card.printed', 'card.printed']);
    const holders = await world.rows('SELECT holder_kind, through FROM holders WHERE passphrase_id = $p', {
      p: boat.networks.guest.passphraseId,
    });
    expect(holders).toEqual([{ holder_kind: 'person', through: 'reveal' }]);
  }, 30_000);

  test('an A6 card for a guest who comes after the change carries the passphrase to come, from its time', async () => {
    const boat = await world.boat();
    const purser = await boat.as('purser');
    const { id } = boat.networks.guest;
    const next = `staged-marker-${boat.vesselId.slice(0, 8)}`;
    const change = day(app, 6, 1);
    await world.staged(boat.vesselId, id, next, change);
    const partyId = await world.party(boat.vesselId, day(app, 6, 5), day(app, 13));
    const guestId = await world.guest(boat.vesselId, partyId, {
      name: 'Nils Abara',
      language: 'de',
      from: day(app, 6, 5),
      until: day(app, 13),
    });
    const print = (body: object) =>
      purser.post(`${boat.base}/networks/${id}/cards/print`, { format: 'cabin', ...body });

    const later = pdf(await print({ guestIds: [guestId] }).expect(200));
    expect((await decodePdf(later)).map((payload) => readAsZxing(payload)?.password)).toEqual([next]);
    expect(await pdfText(later)).toContain('Gültig ab Sa., 20. Juni, 15:12 Uhr');

    // The innocent neighbour: who is aboard now still gets the one in force.
    const now = pdf(await print({ guestIds: [at(boat.guests, 0).id] }).expect(200));
    expect((await decodePdf(now)).map((payload) => readAsZxing(payload)?.password)).toEqual([
      boat.networks.guest.passphrase,
    ]);
    const asked = pdf(await print({ blanks: 1, which: 'staged', language: 'fr' }).expect(200));
    expect((await decodePdf(asked)).map((payload) => readAsZxing(payload)?.password)).toEqual([next]);
  }, 30_000);

  test('printing again makes the card in the drawer void, unless told otherwise', async () => {
    const boat = await world.boat();
    const purser = await boat.as('purser');
    const guestIds = [at(boat.guests, 1).id];
    const print = (body: object) =>
      purser
        .post(`${boat.base}/networks/${boat.networks.guest.id}/cards/print`, {
          guestIds,
          format: 'wallet',
          ...body,
        })
        .expect(200);
    await print({});
    await print({ keepEarlier: true });
    expect((await cardsOf(boat)).map(({ state }) => state)).toEqual(['printed', 'printed']);
    await print({});
    expect((await cardsOf(boat)).map(({ state }) => state)).toEqual(['void', 'void', 'printed']);
  });

  test('a name no font has leaves every card unprinted, names the guest, and uses no serial up (R44)', async () => {
    const boat = await world.boat();
    const purser = await boat.as('purser');
    const odd = await world.guest(boat.vesselId, boat.partyId, { name: '王 小明 𓀀', position: 3 });
    const guestIds = [at(boat.guests, 0).id, odd];
    const answer = await purser
      .post(`${boat.base}/networks/${boat.networks.guest.id}/cards/print`, { guestIds, format: 'wallet' })
      .expect(422);
    expect(Object.keys(answer.body.errors)).toEqual(['guestIds.1']);
    expect(answer.body.errors['guestIds.1'][0]).toContain('The guest name cannot be printed');
    expect(await cardsOf(boat)).toEqual([]);
    expect(await kindsOf(boat)).toEqual([]);

    const good = await purser
      .post(`${boat.base}/networks/${boat.networks.guest.id}/cards/print`, {
        guestIds: guestIds.slice(0, 1),
        format: 'wallet',
      })
      .expect(200);
    expect(good.headers['content-disposition']).toContain('Card M-1001.pdf');
  });

  test('two pursers printing at once use no serial twice', async () => {
    const boat = await world.boat();
    const pursers = [await boat.as('purser'), await boat.as('chief_stew')];
    await Promise.all(
      [0, 1, 2, 3].map((index) =>
        at(pursers, index % 2)
          .post(`${boat.base}/networks/${boat.networks.guest.id}/cards/print`, {
            blanks: 3,
            format: 'wallet',
          })
          .expect(200),
      ),
    );
    const serials = (await cardsOf(boat)).map(({ serial }) => serial);
    expect(serials).toEqual(Array.from({ length: 12 }, (_one, index) => `M-${1001 + index}`));
  }, 30_000);

  test('R30: a card whose passphrase is retired is gone; the one in force can be printed again, by its own role only', async () => {
    const boat = await world.boat();
    const captain = await boat.as('captain');
    const { id, passphraseId } = boat.networks.crew;
    await captain
      .post(`${boat.base}/networks/${id}/cards/print`, {
        crewMemberIds: [boat.crewMemberId],
        format: 'wallet',
      })
      .expect(200);
    const [card] = await world.rows<{ id: string }>('SELECT id FROM cards WHERE vessel_id = $v', {
      v: boat.vesselId,
    });
    const again = (client: Client, body = {}) => client.post(`${boat.base}/cards/${card?.id}/reprint`, body);
    await again(await boat.as('purser')).expect(403);
    await again(captain).expect(200);
    expect((await cardsOf(boat)).map(({ state }) => state)).toEqual(['void', 'printed']);

    await world.write('UPDATE passphrases SET retired_at = $now WHERE id = $id', {
      id: passphraseId,
      now: app.clock.now(),
    });
    const answer = await again(captain).expect(410);
    expect(answer.body.detail).toBe(
      'Card M-1001 carries a passphrase that is no longer in force. Print a new card instead.',
    );
    const none = await captain
      .post(`${boat.base}/networks/${id}/cards/print`, { blanks: 1, format: 'wallet' })
      .expect(409);
    expect(none.body.detail).toContain('No passphrase in force is on record');
  });

  test('who may not print, and other vessels’ people, get nothing (R15)', async () => {
    const boat = await world.boat();
    const other = await world.boat({ name: 'Corvina' });
    const body = { guestIds: [at(boat.guests, 0).id], format: 'wallet' };
    const print = (client: Client, audience: 'owner' | 'guest' | 'crew', given: object = body) =>
      client.post(`${boat.base}/networks/${boat.networks[audience].id}/cards/print`, given);
    await print(anonymousClient(app), 'guest').expect(401);
    await print(await boat.as('eto'), 'guest').expect(403);
    await print(await boat.as('purser'), 'owner').expect(403);
    await print(await boat.as('purser'), 'crew').expect(403);
    await print(await other.as('captain'), 'guest').expect(404);
    await print(await boat.as('purser'), 'guest', {
      ...body,
      guestIds: [at(boat.guests, 0).id, at(other.guests, 0).id],
    }).expect(404);
    const dealer = await make.dealerMember(await make.dealer());
    await print(new Client(app, await make.session(dealer.id)), 'guest').expect(404);
    const captain = await boat.as('captain');
    await print(captain, 'guest', { format: 'wallet' }).expect(422);
    await print(captain, 'guest', { ...body, blanks: 2 }).expect(422);
    await print(captain, 'guest', { blanks: 0, format: 'wallet' }).expect(422);
    await print(captain, 'guest', { blanks: 501, format: 'wallet' }).expect(422);
    await print(captain, 'guest', { blanks: 1, format: 'poster' }).expect(422);
    expect(await cardsOf(boat)).toEqual([]);
    await print(captain, 'owner', { blanks: 1, format: 'wallet' }).expect(200);
  });

  test('R42: a file is called by serial numbers, whatever boat and network are called (RFC 6266)', async () => {
    const boat = await world.boat({ name: `../e"t;*=''x` });
    await world.write("UPDATE networks SET ssid = $ssid WHERE vessel_id = $v AND audience = 'guest'", {
      ssid: '..\\CON"; x=é',
      v: boat.vesselId,
    });
    const captain = await boat.as('captain');
    for (const blanks of [1, 3]) {
      const answer = await captain
        .post(`${boat.base}/networks/${boat.networks.guest.id}/cards/print`, { blanks, format: 'wallet' })
        .expect(200);
      expect(answer.headers['content-disposition']).toMatch(
        /^attachment; filename="Cards? \S+-\d+( to \S+-\d+)?\.pdf"$/,
      );
      expect(answer.headers['content-disposition']).not.toMatch(/[/\\;*']{2}|\.\.|CON/);
    }
  });

  test('R13: the owner’s network asks for a fresh proof, the guests’ never does', async () => {
    const boat = await world.boat();
    const captain = await boat.as('captain');
    app.clock.advance(11 * 60_000);
    const print = (audience: 'owner' | 'guest') =>
      captain.post(`${boat.base}/networks/${boat.networks[audience].id}/cards/print`, {
        blanks: 1,
        format: 'wallet',
      });
    expect((await print('owner').expect(403)).body.code).toBe('step_up');
    await print('guest').expect(200);
  });
});
