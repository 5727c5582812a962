import type { GuestView } from '../../shared/api/arrivals.ts';
import type { Tx } from '../db/connection.ts';
import { AppError } from '../errors.ts';
import { appendLog } from '../handovers/appendLog.ts';
import { lockLog } from '../handovers/lockLog.ts';
import type { Verb } from '../http/verb.ts';
import type { Services } from '../services.ts';
import { lockGuest } from './editGuest.ts';
import { viewGuest } from './guestRows.ts';
import { logThat, vesselOf } from './verb.ts';

const BATCH = 500;

/** Erases one guest's name on request, here and in the log. Only once they are gone or hold nothing. */
export async function eraseGuest(context: Verb, guestId: string): Promise<GuestView> {
  const { services, tx, now } = context;
  const vesselId = vesselOf(context);
  const guest = await lockGuest(context, guestId);
  if (guest.ashore_at === null && guest.until_at.getTime() > now.getTime()) {
    throw new AppError(
      'not_now',
      'This guest is still expected or aboard. Mark them ashore first, then erase the name.',
    );
  }
  await forget(services, tx, vesselId, [guestId], now);
  await logThat(context, {
    kind: 'guest.changed',
    subject: { kind: 'guest', id: guestId },
    body: { erased: true },
  });
  return viewGuest(services, tx, vesselId, guestId);
}

/**
 * Erases the names of guests who have been gone for longer than their vessel keeps them. The entries of the log
 * stay, with their commitments and without the names, so the chain still holds. Answers how many were erased.
 */
export async function eraseGuests(services: Services): Promise<number> {
  const now = services.clock.now();
  const vessels = await services.db.transaction({ kind: 'system' }, (tx) =>
    services.db.rows<{ id: string }>(tx, `SELECT DISTINCT g.vessel_id AS id FROM ${DUE}`, { now }),
  );
  let erased = 0;
  for (const { id: vesselId } of vessels) {
    erased += await services.db.transaction({ kind: 'vessel', vesselId }, async (tx) => {
      await lockLog(services, tx, vesselId);
      const due = await services.db.rows<{ id: string }>(
        tx,
        `SELECT g.id FROM ${DUE} AND g.vessel_id = $vessel ORDER BY g.until_at LIMIT $batch FOR UPDATE OF g`,
        { now, vessel: vesselId, batch: BATCH },
      );
      if (due.length === 0) return 0;
      await forget(
        services,
        tx,
        vesselId,
        due.map(({ id }) => id),
        now,
      );
      await appendLog(services, tx, [
        { vesselId, kind: 'guest.changed', at: now, body: { erased: true, guests: due.length } },
      ]);
      return due.length;
    });
  }
  return erased;
}

const DUE = `guests g JOIN vessels v ON v.id = g.vessel_id WHERE g.erased_at IS NULL
  AND coalesce(g.ashore_at, g.until_at) + make_interval(days => v.retention_days) <= $now`;

async function forget(
  services: Services,
  tx: Tx,
  vesselId: string,
  ids: readonly string[],
  now: Date,
): Promise<void> {
  const { db } = services;
  const bind = { vessel: vesselId, ids };
  await db.run(
    tx,
    `UPDATE guests SET name = NULL, erased_at = $now, updated_at = $now
     WHERE vessel_id = $vessel AND id = ANY($ids::uuid[])`,
    { ...bind, now },
  );
  await db.run(
    tx,
    `DELETE FROM log_names n USING log_entries e WHERE n.entry_id = e.id AND n.role = 'subject'
       AND n.vessel_id = $vessel AND e.vessel_id = $vessel AND e.subject_kind = 'guest' AND e.subject_id = ANY($ids::uuid[])`,
    bind,
  );
  // First answers kept for repeats may carry the name as well.
  await db.run(
    tx,
    "DELETE FROM idempotency_keys WHERE vessel_id = $vessel AND response ->> 'id' = ANY($ids::text[])",
    bind,
  );
}
