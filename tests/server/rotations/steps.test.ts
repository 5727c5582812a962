import { randomUUID } from 'node:crypto';
import { describe, expect, test } from 'vitest';
import type { RotationState } from '../../../shared/api/common.ts';
import { ROTATION_STEPS } from '../../../shared/rules/rotation.ts';
import { useApp } from '../../support/app.ts';
import { factories } from '../../support/factories.ts';

const app = useApp();
const make = factories(app);
const STATES = Object.keys(ROTATION_STEPS) as RotationState[];

class Undo extends Error {}

describe('the database and the rules agree on every step (I4, I5)', () => {
  test('all pairs of states', async () => {
    const vesselId = await make.vessel();
    const network = await make.network(vesselId, { live: 'a passphrase for every step' });
    const { db } = app.services;
    const now = app.clock.now();
    let allowed = 0;
    for (const from of STATES) {
      for (const to of STATES) {
        const outcome = await db
          .transaction({ kind: 'system' }, async (tx) => {
            const id = randomUUID();
            await db.run(
              tx,
              `INSERT INTO rotations(id, vessel_id, network_id, state, driver, epoch, planned_by, due_at, created_at, updated_at)
               VALUES ($id, $vessel, $network, $from, 'by_hand', 1, 'plan', $now, $now, $now)`,
              { id, vessel: vesselId, network: network.id, from, now },
            );
            await db.run(tx, 'UPDATE rotations SET state = $to WHERE id = $id', { id, to });
            throw new Undo();
          })
          .catch((error: unknown) => (error instanceof Undo ? 'taken' : String(error)));
        const should = from === to || ROTATION_STEPS[from].includes(to);
        if (should) allowed += 1;
        expect([from, to, outcome.includes('may not go from') ? 'refused' : outcome]).toEqual([
          from,
          to,
          should ? 'taken' : 'refused',
        ]);
      }
    }
    expect(STATES).toHaveLength(12);
    expect(allowed).toBe(12 + Object.values(ROTATION_STEPS).flat().length);
  });

  test('a ticket keeps its number and its passphrase, and a network has one open change', async () => {
    const vesselId = await make.vessel();
    const network = await make.network(vesselId, { live: 'the first of this network' });
    const { db } = app.services;
    const now = app.clock.now();
    const attempt = (sql: string) =>
      db
        .transaction({ kind: 'system' }, async (tx) => {
          const id = randomUUID();
          await db.run(
            tx,
            `INSERT INTO rotations(id, vessel_id, network_id, state, driver, epoch, ticket, to_passphrase_id, planned_by, due_at, created_at, updated_at)
             VALUES ($id, $vessel, $network, 'staged', 'by_hand', 1, 5, $to, 'plan', $now, $now, $now)`,
            { id, vessel: vesselId, network: network.id, to: network.passphraseId, now },
          );
          await db.run(tx, sql, { id });
          throw new Undo();
        })
        .catch((error: unknown) => (error instanceof Undo ? 'taken' : String(error)));
    expect(await attempt('UPDATE rotations SET ticket = 6 WHERE id = $id')).toContain(
      'a ticket number never changes',
    );
    expect(await attempt('UPDATE rotations SET to_passphrase_id = NULL WHERE id = $id')).toContain(
      'keeps its passphrase',
    );
    expect(await attempt('UPDATE rotations SET ticket = ticket WHERE id = $id')).toBe('taken');
    expect(
      await attempt(
        `INSERT INTO rotations SELECT (jsonb_populate_record(r, jsonb_build_object('id', gen_random_uuid(), 'ticket', 6))).* FROM rotations r WHERE id = $id`,
      ),
    ).toContain('rotations_one_open');
    expect(await attempt('DELETE FROM rotations WHERE id = $id')).toContain('permission denied');
  });
});
