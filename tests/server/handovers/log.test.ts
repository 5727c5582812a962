import { parse } from 'csv-parse/sync';
import { describe, expect, test } from 'vitest';
import { appendLog, type LogEvent } from '../../../server/handovers/appendLog.ts';
import { checkpointKey } from '../../../server/handovers/checkpoint.ts';
import { verifyChain } from '../../../server/handovers/verifyChain.ts';
import { eraseGuests } from '../../../server/voyages/eraseGuests.ts';
import { useApp } from '../../support/app.ts';
import { charterBoat } from '../../support/charterBoat.ts';
import { Client } from '../../support/client.ts';
import { factories } from '../../support/factories.ts';

const app = useApp();
const make = factories(app);
const DAY_MS = 86_400_000;

type Entry = { seq: number; kind: string; subject: { name: string | null } | null };

/** A vessel whose log holds nothing but what the test writes into it. */
async function logged(count: number, event: (index: number) => Partial<LogEvent> = () => ({})) {
  const vesselId = await make.vessel();
  const network = await make.network(vesselId, { live: `log-marker-${vesselId.slice(0, 13)}` });
  await app.services.db.transaction({ kind: 'vessel', vesselId }, (tx) =>
    appendLog(
      app.services,
      tx,
      Array.from({ length: count }, (_one, index) => ({
        vesselId,
        kind: 'guest.added' as const,
        at: app.clock.now(),
        ...event(index),
      })),
    ),
  );
  const base = `/vessels/${vesselId}`;
  const as = async (role: 'captain' | 'chief_stew' | 'purser' | 'eto') =>
    new Client(app, await make.session((await make.member(vesselId, role)).id));
  return { vesselId, network, base, as };
}

describe('reading the log', () => {
  test('newest first, every entry once over the pages, also where many bear the same instant', async () => {
    const { base, as } = await logged(125);
    const purser = await as('purser');
    const seen: number[] = [];
    let after: string | null = '';
    while (after !== null) {
      const page: { body: { entries: Entry[]; after: string | null } } = await purser
        .get(`${base}/log?limit=50${after ? `&after=${after}` : ''}`)
        .expect(200);
      seen.push(...page.body.entries.map(({ seq }) => seq));
      after = page.body.after;
    }
    expect(seen).toEqual(Array.from({ length: 125 }, (_one, index) => 125 - index));
  });

  test('by network, kind, person and time', async () => {
    const network = await make.network(await make.vessel(), {});
    const { base, as } = await logged(4, (index) => ({
      at: new Date(Date.UTC(2026, 5, 10 + index)),
      kind: index === 2 ? 'card.lost' : 'guest.added',
      networkId: index === 1 ? network.id : null,
      subject: {
        kind: 'guest',
        id: network.id,
        name: ['Zoë Brandt', 'Mia_Vela', 'Ben 100%', null][index] ?? null,
      },
    }));
    const purser = await as('purser');
    const seqs = async (query: string) =>
      (await purser.get(`${base}/log?${query}`).expect(200)).body.entries.map(({ seq }: Entry) => seq);
    expect(await seqs(`networkId=${network.id}`)).toEqual([2]);
    expect(await seqs('kind=card.lost')).toEqual([3]);
    expect(await seqs('person=brandt')).toEqual([1]);
    expect(await seqs('person=a_V')).toEqual([2]);
    expect(await seqs('person=0%25')).toEqual([3]);
    expect(await seqs('person=%25%25')).toEqual([]);
    expect(await seqs('from=2026-06-11T00:00:00Z&to=2026-06-13T00:00:00Z')).toEqual([3, 2]);
    const all = (await purser.get(`${base}/log`).expect(200)).body;
    expect(all.entries[3]).toMatchObject({ words: 'Guest added', subject: { name: 'Zoë Brandt' } });
    expect(JSON.stringify(all)).not.toContain('Commitment');
  });

  test('R36: a cursor of another log, a changed one and wild queries are refused', async () => {
    const [one, other] = [await logged(30), await logged(30)];
    const purser = await one.as('purser');
    const { after } = (await purser.get(`${one.base}/log?limit=10`).expect(200)).body;
    await purser.get(`${one.base}/log?limit=10&after=${after}`).expect(200);
    const theirs = await other.as('purser');
    await theirs.get(`${other.base}/log?after=${after}`).expect(400);
    const [text = '', signed = ''] = after.split('.');
    const forged = Buffer.from(`2030-01-01T00:00:00.000Z_999`).toString('base64url');
    for (const cursor of [
      `${forged}.${signed}`,
      `${text}.`,
      text,
      `${after}x`,
      `${after}.${signed}`,
      '.',
      'x'.repeat(400),
    ])
      await purser.get(`${one.base}/log?after=${cursor}`).expect(400);
    for (const query of [
      'limit=-1',
      'limit=0',
      'limit=101',
      'limit=1000000000',
      'limit=abc',
      'limit=NaN',
      'limit=1e400',
      'limit=1&limit=2',
      'person=a',
      `person=${'a'.repeat(101)}`,
      'person=a&person=b',
      'kind=password',
      'networkId=1',
      'from=yesterday',
      'sort=password',
      'offset=1000000000000',
      `after=${'x'.repeat(401)}`,
    ]) {
      const refused = await purser.get(`${one.base}/log?${query}`);
      expect([query, refused.status]).toEqual([query, 422]);
    }
    await (await one.as('eto')).get(`${one.base}/log`).expect(403);
    await purser.get(`${other.base}/log`).expect(404);
  });
});

describe('exporting the log', () => {
  const NAMES = [
    '=1+1',
    "=cmd|' /C calc'!A0",
    '=HYPERLINK("http://a.example","x")',
    '+41 79',
    '-Anna',
    '@Anna',
    '＝Anna',
    ' =Anna',
    '"=Anna"',
    "O'Neil, Ben",
    'Zoë "Zo" Brandt',
  ];

  test('R40: every cell is text to a spreadsheet, and the names come back as they were (RFC 4180)', async () => {
    const { base, as } = await logged(NAMES.length, (index) => ({
      subject: { kind: 'guest', id: '00000000-0000-4000-8000-000000000001', name: NAMES[index] ?? null },
    }));
    const stew = await as('chief_stew');
    const file = await stew.post(`${base}/log/export`).expect(200);
    expect(file.headers['content-type']).toBe('text/csv; charset=utf-8');
    expect(file.headers['content-disposition']).toMatch(/^attachment; filename="log-\d{4}-\d\d-\d\d\.csv"$/);
    const cells: string[][] = parse(file.text, { bom: true });
    const about = cells.slice(1).map((row) => row[5] ?? '');
    for (const cell of cells.flat()) expect(cell).not.toMatch(/^[\s"]*[=+\-@＝＋－＠]/u);
    expect(about.map((cell) => cell.replace(/^'(?=[\s'"]*[=+\-@＝])/u, ''))).toEqual([...NAMES].reverse());
    const [newest] = (await stew.get(`${base}/log?limit=1`).expect(200)).body.entries;
    expect(newest).toMatchObject({ kind: 'log.exported', facts: { entries: NAMES.length } });
  });

  test('only for heads of department, and only with a fresh proof of identity', async () => {
    const { base, as } = await logged(3, () => ({ kind: 'card.lost' }));
    await (await as('purser')).post(`${base}/log/export`).expect(403);
    const captain = await as('captain');
    const few = await captain.post(`${base}/log/export`, { kind: 'guest.added' }).expect(200);
    expect(few.text.split('\r\n')).toHaveLength(2);
    await captain.post(`${base}/log/export`, { person: 'x' }).expect(422);
    const at = app.clock.now();
    try {
      app.clock.advance(10 * 60_000 + 1);
      expect((await captain.post(`${base}/log/export`).expect(403)).body.code).toBe('step_up');
    } finally {
      app.clock.set(at);
    }
  });
});

describe('R49: erasing a guest', () => {
  const verify = (vesselId: string) =>
    app.services.db.transaction({ kind: 'system' }, (tx) =>
      verifyChain(app.services.db, tx, vesselId, {
        key: checkpointKey(app.services.config.logSigningSeed),
        outside: [],
      }),
    );

  test('on request: the name is nowhere, the entry stays, the chain holds', async () => {
    const boat = await charterBoat(app, make);
    const partyId = await boat.party();
    const guestId = await boat.guest(partyId, 'Marguerite Sandoval');
    await boat.guest(partyId, 'Ben Vela');
    await boat.purser
      .post(`${boat.base}/handovers`, { guestId, networkId: boat.network.id, channel: 'screen' })
      .expect(201);
    const path = `${boat.base}/guests/${guestId}`;
    const early = await boat.purser.post(`${path}/erase`).expect(409);
    expect(early.body.detail).toContain('Mark them ashore first');
    await boat.purser.post(`${path}/ashore`).expect(200);
    const before = (await boat.kinds()).length;
    expect((await boat.purser.post(`${path}/erase`).expect(200)).body).toMatchObject({
      name: null,
      label: 'Guest 1',
    });
    expect((await boat.purser.post(`${path}/erase`)).status).toBe(410);
    expect((await boat.purser.patch(path, { name: 'Marguerite Sandoval' })).status).toBe(410);
    expect(await boat.kinds()).toHaveLength(before + 1);
    const left = await boat.rows<{ place: string }>(
      `SELECT 'guests' AS place FROM guests WHERE name LIKE '%Sandoval%'
       UNION ALL SELECT 'log_names' FROM log_names WHERE name LIKE '%Sandoval%'
       UNION ALL SELECT 'log_entries' FROM log_entries WHERE body::text LIKE '%Sandoval%'
       UNION ALL SELECT 'idempotency_keys' FROM idempotency_keys WHERE response::text LIKE '%Sandoval%'`,
    );
    expect(left).toEqual([]);
    expect(
      await boat.rows("SELECT name FROM log_names WHERE vessel_id = $vessel AND name = 'Ben Vela'"),
    ).toHaveLength(1);
    expect((await verify(boat.vesselId)).bad).toBeNull();
    const log = await boat.purser.get(`${boat.base}/log?kind=handover.screen`).expect(200);
    expect(log.body.entries).toMatchObject([{ subject: { kind: 'guest', id: guestId, name: null } }]);
  });

  test("after the vessel's retention, by itself, and not a day before", async () => {
    const boat = await charterBoat(app, make);
    const partyId = await boat.party('Halloran party', -2, 24);
    await boat.guest(partyId, 'Marguerite Sandoval');
    await boat.guest(partyId, 'Ben Vela');
    const names = () =>
      boat.rows('SELECT name FROM guests WHERE vessel_id = $vessel AND name IS NOT NULL ORDER BY name');
    const at = app.clock.now();
    try {
      app.clock.set(new Date(at.getTime() + DAY_MS + 90 * DAY_MS - 1));
      expect(await eraseGuests(app.services)).toBe(0);
      expect(await names()).toHaveLength(2);
      app.clock.advance(1);
      expect(await eraseGuests(app.services)).toBe(2);
      expect(await eraseGuests(app.services)).toBe(0);
      expect(await names()).toEqual([]);
      expect(
        await boat.rows("SELECT 1 FROM log_names WHERE vessel_id = $vessel AND role = 'subject'"),
      ).toEqual([]);
      expect((await verify(boat.vesselId)).bad).toBeNull();
    } finally {
      app.clock.set(at);
    }
  });
});
