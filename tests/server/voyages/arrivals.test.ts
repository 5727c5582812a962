import { randomUUID } from 'node:crypto';
import { describe, expect, test } from 'vitest';
import { endVisits } from '../../../server/voyages/endVisits.ts';
import { useApp } from '../../support/app.ts';
import { charterBoat } from '../../support/charterBoat.ts';
import { factories } from '../../support/factories.ts';

const app = useApp();
const make = factories(app);

describe('the arrivals screen', () => {
  test('shows the party of now by cabin, its cards, and what was handed over', async () => {
    const boat = await charterBoat(app, make);
    const [two, one] = [await boat.cabin('Cabin 2', 2), await boat.cabin('Cabin 1', 1)];
    await boat.party('Next party', 200, 300);
    const partyId = await boat.party();
    const [anna, ben] = [
      await boat.guest(partyId, 'Anna Brandt', { cabinId: two, language: 'it' }),
      await boat.guest(partyId, null, { cabinId: one, under16: true }),
    ];
    const card = await boat.printCard(anna);
    const seen = await boat.purser.get(`${boat.base}/arrivals`).expect(200);
    expect(seen.body).toMatchObject({
      zone: 'Europe/Zagreb',
      party: { id: partyId, count: 2 },
      network: { id: boat.network.id, live: { passphraseId: boat.network.passphraseId }, staged: null },
      dockCaution: true,
      visitors: [],
    });
    expect(seen.body.parties).toHaveLength(2);
    expect(seen.body.guests.map((guest: { id: string }) => guest.id)).toEqual([ben, anna]);
    expect(seen.body.guests[1]).toMatchObject({
      cabin: { name: 'Cabin 2' },
      printedCard: card,
      handover: null,
    });
    expect(seen.body.guests[0]).toMatchObject({
      name: null,
      label: 'Guest 2',
      under16: true,
      printedCard: null,
    });

    await boat.purser
      .post(`${boat.base}/handovers`, { guestId: anna, networkId: boat.network.id, channel: 'card' })
      .expect(201);
    const after = await boat.purser.get(`${boat.base}/arrivals?partyId=${partyId}`).expect(200);
    expect(after.body.guests[1]).toMatchObject({
      printedCard: null,
      handover: { channel: 'card', serial: card.serial },
    });
  });

  test("another vessel's party, network and guest are not found", async () => {
    const [mine, theirs] = [await charterBoat(app, make), await charterBoat(app, make)];
    const partyId = await theirs.party();
    const guestId = await theirs.guest(partyId);
    await mine.purser.get(`${mine.base}/arrivals?partyId=${partyId}`).expect(404);
    await mine.purser.get(`${mine.base}/arrivals?networkId=${theirs.network.id}`).expect(404);
    await mine.purser.patch(`${mine.base}/guests/${guestId}`, { name: 'X' }).expect(404);
    await mine.purser.post(`${mine.base}/guests`, { partyId, name: 'X' }).expect(404);
    await mine.purser.post(`${mine.base}/parties/${partyId}/ashore`).expect(404);
    const cabinId = await theirs.cabin('Cabin 9', 9);
    const own = await mine.party();
    const wrong = await mine.purser
      .post(`${mine.base}/guests`, { partyId: own, name: 'X', cabinId })
      .expect(422);
    expect(wrong.body.errors).toEqual({ cabinId: ['Choose one of the cabins of this vessel'] });
  });

  test('the ETO reads the calendar without names and nothing of guests', async () => {
    const boat = await charterBoat(app, make);
    const stew = await boat.as('chief_stew');
    const eto = await boat.as('eto');
    const made = await stew
      .post(`${boat.base}/voyages`, {
        kind: 'charter',
        title: 'Halloran charter',
        startsAt: boat.hours(1),
        endsAt: boat.hours(100),
        fromPort: 'Split',
      })
      .expect(201);
    expect((await eto.get(`${boat.base}/voyages`).expect(200)).body.voyages).toMatchObject([
      { title: 'Charter' },
    ]);
    expect((await stew.get(`${boat.base}/voyages`).expect(200)).body.voyages).toMatchObject([
      { title: 'Halloran charter', fromPort: 'Split', toPort: null },
    ]);
    await eto.get(`${boat.base}/arrivals`).expect(403);
    await eto.delete(`${boat.base}/voyages/${made.body.id}`).expect(403);
    const moved = await stew
      .patch(`${boat.base}/voyages/${made.body.id}`, { endsAt: boat.hours(0) })
      .expect(422);
    expect(moved.body.errors).toEqual({ endsAt: ['This must be later than the time it starts'] });
    await stew.patch(`${boat.base}/voyages/${made.body.id}`, { kind: 'owner_trip' }).expect(200);
    await stew.delete(`${boat.base}/voyages/${made.body.id}`).expect(200);
    await stew.delete(`${boat.base}/voyages/${made.body.id}`).expect(404);
  });
});

describe('a list', () => {
  const bytes = (text: string, encoding: 'utf8' | 'utf16le' | 'latin1', mark: number[] = []) =>
    Buffer.concat([Buffer.from(mark), Buffer.from(text, encoding)]).toString('base64');
  const LIST = 'Name;Cabin;Language\nZoë Brandt;1;français\n';

  test.each([
    ['UTF-8', 'UTF-8', bytes(LIST, 'utf8')],
    ['UTF-8 with its mark', 'UTF-8', bytes(LIST, 'utf8', [0xef, 0xbb, 0xbf])],
    ['UTF-16 with its mark', 'UTF-16', bytes(LIST, 'utf16le', [0xff, 0xfe])],
    ['UTF-16 without', 'UTF-16', bytes(LIST, 'utf16le')],
    ['UTF-16 the other way round', 'UTF-16', Buffer.from(LIST, 'utf16le').swap16().toString('base64')],
    ['Latin-1', 'Latin-1', bytes(LIST, 'latin1')],
  ])('in %s', async (_name, encoding, base64) => {
    const boat = await charterBoat(app, make);
    const cabinId = await boat.cabin('Cabin 1', 1);
    const seen = await boat.purser.post(`${boat.base}/arrivals/preview`, { base64 }).expect(200);
    expect(seen.body).toMatchObject({ encoding, rows: [{ name: 'Zoë Brandt', cabinId, language: 'fr' }] });
  });

  test.each([
    ['nothing', {}, 'text'],
    ['both', { text: 'Name\nAnna', base64: 'TmFtZQ==' }, 'text'],
    ['no base64', { base64: 'Näme' }, 'base64'],
    ['NUL bytes (R40)', { base64: Buffer.from('Name\nAn\0na').toString('base64') }, 'base64'],
    [
      'a picture',
      { base64: Buffer.from('89504e470d0a1a0a0000000d49484452', 'hex').toString('base64') },
      'base64',
    ],
    ['no headings', { text: 'Anna\nBen' }, 'text'],
    ['an unknown field', { text: 'Name\nAnna', keep: true }, 'keep'],
  ])('%s is refused', async (_name, body, field) => {
    const boat = await charterBoat(app, make);
    const refused = await boat.purser.post(`${boat.base}/arrivals/preview`, body).expect(422);
    expect(Object.keys(refused.body.errors)).toEqual([field]);
  });

  test('more than 2 MB is refused, exactly 2 MB is read', async () => {
    const boat = await charterBoat(app, make);
    const list = `Name\nAnna\n${' '.repeat(2 * 1024 * 1024 - 10)}`;
    await boat.purser
      .post(`${boat.base}/arrivals/preview`, { base64: Buffer.from(list).toString('base64') })
      .expect(200);
    const more = Buffer.from(`${list} `).toString('base64');
    expect(
      (await boat.purser.post(`${boat.base}/arrivals/preview`, { base64: more })).status,
    ).toBeGreaterThanOrEqual(413);
  });

  test('nothing is kept until it is confirmed; then exactly what was', async () => {
    const boat = await charterBoat(app, make);
    const partyId = await boat.party();
    const text = 'Name,Cabin,Language,Passport\nAnna Brandt,1,it,K8842913\n,2,en,K1\n"=Ben",9,de,K2\n';
    const seen = await boat.purser.post(`${boat.base}/arrivals/preview`, { text }).expect(200);
    expect(seen.text).not.toContain('K8842913');
    expect(seen.body).toMatchObject({ leftOut: 1, wrong: [{ line: 3, field: 'Name' }] });
    const kept = await boat.rows(
      `SELECT (SELECT count(*)::int FROM guests WHERE vessel_id = $vessel) AS guests,
         (SELECT count(*)::int FROM idempotency_keys WHERE vessel_id = $vessel AND response::text LIKE '%Brandt%') AS answers`,
    );
    expect(kept).toEqual([{ guests: 0, answers: 0 }]);

    const confirmed = seen.body.rows.map((row: Record<string, unknown>) => {
      const { line, notes, ...rest } = row;
      return rest;
    });
    const added = await boat.purser
      .post(`${boat.base}/arrivals/import`, { partyId, rows: confirmed })
      .expect(201);
    expect(added.body).toEqual({ partyId, added: 2 });
    expect(
      await boat.rows('SELECT name, label, language FROM guests WHERE vessel_id = $vessel ORDER BY position'),
    ).toEqual([
      { name: 'Anna Brandt', label: 'Guest 1', language: 'it' },
      { name: '=Ben', label: 'Guest 2', language: 'de' },
    ]);
    expect(await boat.kinds()).toEqual(expect.arrayContaining(['party.added', 'guest.imported']));
  });

  test('one wrong line stores none, each named by its place', async () => {
    const boat = await charterBoat(app, make);
    const partyId = await boat.party();
    const row = { name: 'Anna' };
    const send = (rows: object[]) => boat.purser.post(`${boat.base}/arrivals/import`, { partyId, rows });
    const named = await send([row, row, row, { name: '' }]).expect(422);
    expect(named.body.errors).toEqual({ 'rows.3.name': ['Give a name'] });
    const cabin = await send([row, { ...row, cabinId: randomUUID() }]).expect(422);
    expect(cabin.body.errors).toEqual({ 'rows.1.cabinId': ['Choose one of the cabins of this vessel'] });
    const early = await send([row, { ...row, untilAt: boat.hours(-500) }]).expect(422);
    expect(Object.keys(early.body.errors)).toEqual(['rows.1.untilAt']);
    await send([]).expect(422);
    await send(Array.from({ length: 501 }, () => row)).expect(422);
    expect(await boat.rows('SELECT 1 FROM guests WHERE vessel_id = $vessel')).toEqual([]);
  });

  test('a new party and its guests in one go, or neither', async () => {
    const boat = await charterBoat(app, make);
    const newParty = { name: 'Vela party', arrivesAt: boat.hours(5), leavesAt: boat.hours(2) };
    const wrong = await boat.purser
      .post(`${boat.base}/arrivals/import`, { newParty, rows: [{ name: 'Anna' }] })
      .expect(422);
    expect(Object.keys(wrong.body.errors)).toEqual(['newParty.leavesAt']);
    expect(await boat.rows('SELECT 1 FROM parties WHERE vessel_id = $vessel')).toEqual([]);
    const right = { ...newParty, leavesAt: boat.hours(50) };
    await boat.purser
      .post(`${boat.base}/arrivals/import`, { newParty: right, rows: [{ name: 'Anna' }] })
      .expect(201);
    const [guest] = await boat.rows<{ from_at: Date; until_at: Date }>(
      'SELECT from_at, until_at FROM guests WHERE vessel_id = $vessel',
    );
    expect([guest?.from_at.toISOString(), guest?.until_at.toISOString()]).toEqual([
      right.arrivesAt,
      right.leavesAt,
    ]);
  });
});

describe('guests and visitors', () => {
  test('a guest is corrected, and one who was given nothing is taken off', async () => {
    const boat = await charterBoat(app, make);
    const partyId = await boat.party();
    const guestId = await boat.guest(partyId);
    const path = `${boat.base}/guests/${guestId}`;
    const edited = await boat.purser.patch(path, { name: null, language: 'de', under16: true }).expect(200);
    expect(edited.body).toMatchObject({ name: null, label: 'Guest 1', language: 'de', under16: true });
    await boat.purser.patch(path, { language: 'xx' }).expect(422);
    await boat.purser.patch(path, { untilAt: boat.hours(-300) }).expect(422);
    await boat.purser
      .post(`${boat.base}/handovers`, { guestId, networkId: boat.network.id, channel: 'screen' })
      .expect(201);
    const kept = await boat.purser.delete(path).expect(409);
    expect(kept.body.detail).toContain('Mark them ashore instead');
    const other = await boat.guest(partyId, 'Ben');
    await boat.purser.delete(`${boat.base}/guests/${other}`).expect(200);
    await boat.purser.delete(`${boat.base}/guests/${other}`).expect(404);
  });

  test('a visitor has an end time, and is ashore when it passes', async () => {
    const boat = await charterBoat(app, make);
    await boat.purser
      .post(`${boat.base}/visitors`, { name: 'Mira Kos', untilAt: boat.hours(-1) })
      .expect(422);
    const made = await boat.purser
      .post(`${boat.base}/visitors`, { name: 'Mira Kos', untilAt: boat.hours(5) })
      .expect(201);
    expect(made.body).toMatchObject({ label: 'Visitor 1', partyId: null, cabin: null });
    await boat.purser
      .post(`${boat.base}/handovers`, {
        guestId: made.body.id,
        networkId: boat.network.id,
        channel: 'screen',
      })
      .expect(201);
    await endVisits(app.services);
    const before = await boat.purser.get(`${boat.base}/arrivals`).expect(200);
    expect(before.body.visitors).toMatchObject([{ ashoreAt: null, handover: { channel: 'screen' } }]);
    const at = app.clock.now();
    try {
      app.clock.advance(5 * 3_600_000);
      expect(await endVisits(app.services)).toBe(1);
      expect(await endVisits(app.services)).toBe(0);
    } finally {
      app.clock.set(at);
    }
    expect(
      await boat.rows('SELECT departed_at IS NOT NULL AS gone FROM holders WHERE vessel_id = $vessel'),
    ).toEqual([{ gone: true }]);
  });

  test('a party moves with its guests, and a guest who would not fit is named', async () => {
    const boat = await charterBoat(app, make);
    const partyId = await boat.party('Halloran party', 10, 100);
    const own = boat.hours(20);
    await boat.guest(partyId, 'Anna');
    await boat.guest(partyId, 'Ben', { untilAt: own });
    const path = `${boat.base}/parties/${partyId}`;
    await boat.purser.patch(path, { arrivesAt: boat.hours(12) }).expect(200);
    expect(
      (
        await boat.rows<{ from_at: Date; until_at: Date }>(
          'SELECT from_at, until_at FROM guests WHERE vessel_id = $vessel ORDER BY position',
        )
      ).map(({ from_at, until_at }) => [from_at.toISOString(), until_at.toISOString()]),
    ).toEqual([
      [boat.hours(12), boat.hours(100)],
      [boat.hours(12), own],
    ]);
    const late = await boat.purser.patch(path, { arrivesAt: boat.hours(30) }).expect(422);
    expect(late.body.errors.arrivesAt[0]).toContain('Ben has times of their own');
  });
});
