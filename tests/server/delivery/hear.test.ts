import { expect, test } from 'vitest';
import { hearRehearsals } from '../../../server/delivery/hear.ts';
import { isSilent } from '../../../server/fleet/judge.ts';
import { useApp } from '../../support/app.ts';
import { factories } from '../../support/factories.ts';

const app = useApp();
const make = factories(app);
const MINUTE = 60_000;

const run = (sql: string, bind: Record<string, unknown>) =>
  app.services.db.transaction({ kind: 'system' }, (tx) => app.services.db.run(tx, sql, bind));

async function boat(driver: 'rehearsal' | 'by_hand', silent: readonly boolean[]): Promise<string> {
  const vesselId = await make.vessel({ driver });
  const network = await make.network(vesselId, {
    audience: 'crew',
    live: `words of ${vesselId.slice(0, 8)} aboard`,
  });
  for (const [index, one] of silent.entries()) {
    await run(
      `INSERT INTO rehearsal_access_points(access_point_id, network_id, vessel_id, passphrase_id, silent)
       VALUES ($point, $network, $vessel, $passphrase, $silent)`,
      {
        point: await make.accessPoint(vesselId, `Deck ${index}`),
        network: network.id,
        vessel: vesselId,
        passphrase: network.passphraseId,
        silent: one,
      },
    );
  }
  return vesselId;
}

const heard = async (vesselId: string): Promise<Date | null> => {
  const [row] = await app.services.db.transaction({ kind: 'system' }, (tx) =>
    app.services.db.rows<{ last_heard_at: Date | null }>(
      tx,
      'SELECT last_heard_at FROM vessels WHERE id = $id',
      {
        id: vesselId,
      },
    ),
  );
  return row?.last_heard_at ?? null;
};

test('a pretended boat is heard while any access point answers, and silent while it is told to be', async () => {
  const answering = await boat('rehearsal', [false, false]);
  const half = await boat('rehearsal', [true, false]);
  const silent = await boat('rehearsal', [true, true]);
  const byHand = await boat('by_hand', [false]);
  const start = app.clock.now();
  await run('UPDATE vessels SET last_heard_at = $start', { start });

  app.clock.advance(30_000);
  expect(await hearRehearsals(app.services)).toBe(0);

  app.clock.advance(26 * 60 * MINUTE);
  const [one, other] = await Promise.all([hearRehearsals(app.services), hearRehearsals(app.services)]);
  expect(one + other).toBe(2);
  const now = app.clock.now();
  expect(await Promise.all([answering, half, silent, byHand].map(heard))).toEqual([now, now, start, start]);
  expect(isSilent(await heard(answering), now)).toBe(false);
  expect(isSilent(await heard(silent), now)).toBe(true);

  await run('UPDATE rehearsal_access_points SET silent = false WHERE vessel_id = $id', { id: silent });
  app.clock.advance(MINUTE);
  expect(await hearRehearsals(app.services)).toBe(3);
  expect(await heard(silent)).toEqual(app.clock.now());
});
