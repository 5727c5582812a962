import pg from 'pg';
import { afterAll, afterEach, beforeAll, describe, expect, test } from 'vitest';
import { useApp } from '../../support/app.ts';
import { at, type Boat, boats } from '../../support/boat.ts';
import type { Client } from '../../support/client.ts';

const app = useApp();
const world = boats(app);
let owner: pg.Client;

beforeAll(async () => {
  owner = new pg.Client({ connectionString: app.ownerUrl });
  await owner.connect();
});
afterAll(() => owner.end());

const BREAKS = [
  [
    'no right to insert',
    'REVOKE INSERT ON log_entries FROM quayword_application',
    'GRANT INSERT ON log_entries TO quayword_application',
  ],
  [
    'a rule that refuses every entry',
    'ALTER TABLE log_entries ADD CONSTRAINT log_full CHECK (seq < 0) NOT VALID',
    'ALTER TABLE log_entries DROP CONSTRAINT log_full',
  ],
] as const;
let mend: string | null = null;
afterEach(async () => {
  if (mend) await owner.query(mend);
  mend = null;
});

describe('R49: what cannot be written down does not happen', () => {
  const DISCLOSING: readonly (readonly [
    string,
    (client: Client, boat: Boat) => ReturnType<Client['post']>,
  ])[] = [
    ['reveal', (client, boat) => client.post(`${boat.base}/networks/${boat.networks.guest.id}/reveal`)],
    [
      'card preview',
      (client, boat) => client.post(`${boat.base}/networks/${boat.networks.guest.id}/cards/preview`),
    ],
    [
      'print',
      (client, boat) =>
        client.post(`${boat.base}/networks/${boat.networks.guest.id}/cards/print`, {
          blanks: 2,
          format: 'wallet',
        }),
    ],
    [
      'large code',
      (client, boat) =>
        client.post(`${boat.base}/networks/${boat.networks.guest.id}/guests/${at(boat.guests, 0).id}/show`),
    ],
    [
      'handover',
      (client, boat) =>
        client.post(`${boat.base}/handovers`, {
          guestId: at(boat.guests, 0).id,
          networkId: boat.networks.guest.id,
          channel: 'screen',
        }),
    ],
    ['export of the log', (client, boat) => client.post(`${boat.base}/log/export`)],
    ['guest ashore', (client, boat) => client.post(`${boat.base}/guests/${at(boat.guests, 0).id}/ashore`)],
  ];

  test.each(BREAKS)(
    '%s: nothing is shown, printed, handed over or changed, and reading goes on',
    async (_what, spoil, repair) => {
      const boat = await world.boat();
      const captain = await boat.as('captain');
      const stored = () =>
        world.rows(
          `SELECT (SELECT count(*) FROM cards WHERE vessel_id = $v) AS cards, (SELECT count(*) FROM handovers WHERE vessel_id = $v) AS handovers,
           (SELECT count(*) FROM holders WHERE vessel_id = $v) AS holders, (SELECT last_serial FROM vessels WHERE id = $v) AS serial,
           (SELECT count(*) FROM guests WHERE vessel_id = $v AND ashore_at IS NOT NULL) AS ashore`,
          { v: boat.vesselId },
        );
      const before = await stored();
      mend = repair;
      await owner.query(spoil);
      for (const [what, act] of DISCLOSING) {
        const answer = await act(captain, boat);
        expect([what, answer.status, answer.body.code]).toEqual([what, 503, 'unavailable']);
        expect(answer.body.detail).toContain('The log cannot be written just now');
        expect(answer.text).not.toContain(boat.networks.guest.passphrase);
        expect(answer.headers['content-disposition']).toBeUndefined();
        // With a time to come back the client would take it for a database that is away.
        expect(answer.headers['retry-after']).toBeUndefined();
      }
      expect(await stored()).toEqual(before);
      expect(app.logged()).toContain('log_unwritable');
      for (const page of ['arrivals', 'log', 'holders', 'cards', 'voyages', 'networks'])
        await captain.get(`${boat.base}/${page}`).expect(200);

      await owner.query(repair);
      mend = null;
      for (const [what, act] of DISCLOSING)
        expect([what, (await act(captain, boat)).status < 300]).toEqual([what, true]);
    },
  );
});
