import type { Tx } from '../db/connection.ts';
import { faultPoint } from '../faultPoint.ts';
import type { Services } from '../services.ts';
import { askForSomebody } from './askForSomebody.ts';
import type { By } from './by.ts';
import { enqueueCarryOut, handOutToBoat } from './handOut.ts';
import { readClaimed } from './lockRotation.ts';
import { replanNetwork } from './replan.ts';
import { type StageOptions, stageAll } from './stage.ts';
import { takeStep } from './takeStep.ts';

/** Ahead of its time a guest change is staged, so that cards can be printed, in milliseconds. Common practice, no source. */
export const GUEST_LEAD_MS = 48 * 3_600_000;
/** And any other change. Common practice, no source. */
export const LEAD_MS = 24 * 3_600_000;

/** A boat that has not finished is asked again after this long, in milliseconds: recovery is to take a minute (R52). */
const ASK_AGAIN_MS = 30_000;

const STAGE_BATCH = 500;
const STEP_BATCH = 50;

export interface Swept {
  readonly planned: number;
  readonly staged: number;
  readonly handedOut: number;
  readonly held: number;
  readonly unknown: number;
}

/**
 * One look of the clock at everything: plans what has no plan, stages what is near, hands out what is due,
 * marks what did not report as not known, and asks boats again that have not finished. Each batch is claimed by one statement with SKIP LOCKED and done
 * in the transaction that claimed it, so two servers share the work and a killed one leaves it as it was.
 */
export async function sweep(services: Services): Promise<Swept> {
  const gap = await timeSinceLastLook(services);
  const planned = await inBatches(services, planBatch);
  // Two at a time: while the database writes one batch, the next is made and sealed.
  const staged = sum(await Promise.all([inBatches(services, stageBatch), inBatches(services, stageBatch)]));
  const hold = gap > LONG_GAP_MS && (await countDue(services)) > MASS;
  const due = await inBatches(services, (each, tx, by) => handOutBatch(each, tx, by, hold));
  const unknown = await inBatches(services, reportBatch);
  const unheard = new Date(services.clock.now().getTime() - ASK_AGAIN_MS);
  await inBatches(services, (each, tx, by) => askAgainBatch(each, tx, by, unheard));
  return { planned, staged, handedOut: hold ? 0 : due, held: hold ? due : 0, unknown };
}

const sum = (counts: readonly number[]): number => counts.reduce((total, count) => total + count, 0);

interface Batch {
  readonly done: number;
  /** False when there is nothing more to do now. */
  readonly more: boolean;
}

async function inBatches(
  services: Services,
  batch: (services: Services, tx: Tx, by: By) => Promise<Batch>,
): Promise<number> {
  let total = 0;
  for (;;) {
    const { done, more } = await services.db.transaction({ kind: 'system' }, (tx) =>
      batch(services, tx, { now: services.clock.now(), actor: null }),
    );
    if (done > 0) faultPoint('S4');
    total += done;
    if (!more) return total;
  }
}

/**
 * Claims planned rotations whose lead time has come and stages them. The log head, the network and the
 * rotation are locked together or passed over, never waited for.
 */
export async function stageBatch(
  services: Services,
  tx: Tx,
  by: By,
  options: StageOptions & { readonly batch?: number } = {},
): Promise<Batch> {
  const batch = options.batch ?? STAGE_BATCH;
  const claimed = await services.db.rows<{ id: string }>(
    tx,
    `SELECT r.id FROM rotations r JOIN networks n ON n.id = r.network_id JOIN log_heads h ON h.vessel_id = r.vessel_id
     WHERE r.state = 'planned' AND r.due_at <= $guestUntil AND (n.audience = 'guest' OR r.due_at <= $until)
       AND n.removed_at IS NULL AND EXISTS (
         SELECT 1 FROM access_points a WHERE a.vessel_id = n.vessel_id AND a.removed_at IS NULL)
     ORDER BY r.due_at, r.vessel_id LIMIT $batch FOR UPDATE OF r, n, h SKIP LOCKED`,
    {
      guestUntil: new Date(by.now.getTime() + GUEST_LEAD_MS),
      until: new Date(by.now.getTime() + LEAD_MS),
      batch,
    },
  );
  faultPoint('S1');
  await stageAll(
    services,
    tx,
    claimed.map(({ id }) => id),
    by,
    options,
  );
  // One that was passed over belongs to the other lane, which looks again when it is done with what it holds.
  return { done: claimed.length, more: claimed.length > 0 };
}

/** Claims staged rotations that are due and hands them out, or asks for somebody where they are entered by hand. */
async function handOutBatch(services: Services, tx: Tx, by: By, hold: boolean): Promise<Batch> {
  const claimed = await services.db.rows<{ id: string }>(
    tx,
    `SELECT r.id FROM rotations r JOIN networks n ON n.id = r.network_id JOIN log_heads h ON h.vessel_id = r.vessel_id
     WHERE r.state = 'staged' AND r.due_at <= $now AND n.removed_at IS NULL
       AND NOT (n.carries_equipment AND EXISTS (SELECT 1 FROM voyages v WHERE v.vessel_id = n.vessel_id
         AND v.kind = 'crossing' AND v.starts_at <= $now AND v.ends_at > $now))
     ORDER BY (r.mode = 'urgent') DESC, r.due_at LIMIT $batch FOR UPDATE OF r, n, h SKIP LOCKED`,
    { now: by.now, batch: STEP_BATCH },
  );
  for (const { id } of claimed) {
    const known = await readClaimed(services, tx, id);
    if (known.rotation.driver === 'by_hand') await askForSomebody(services, tx, known, ENTER_IT, by);
    else if (hold) await askForSomebody(services, tx, known, CLOCK_JUMPED, by);
    else await handOutToBoat(services, tx, known, by);
  }
  faultPoint('S6');
  // One that was passed over was held for a moment only: it is looked for again while there is anything to do.
  return { done: claimed.length, more: claimed.length > 0 };
}

const ENTER_IT = 'It is time: open the entry sheet and enter the new passphrase into each access point.';
const CLOCK_JUMPED =
  'Many changes came due at once after the clock jumped or the server was away for more than a day. Check the date, then let this one go on.';

/** Claims rotations that should have reported by now: their state is not known, which is never rounded. */
async function reportBatch(services: Services, tx: Tx, by: By): Promise<Batch> {
  const claimed = await services.db.rows<{ id: string }>(
    tx,
    `SELECT r.id FROM rotations r JOIN networks n ON n.id = r.network_id JOIN log_heads h ON h.vessel_id = r.vessel_id
     WHERE r.state IN ('handed_out','applying') AND r.report_by <= $now
     ORDER BY r.report_by LIMIT $batch FOR UPDATE OF r, n, h SKIP LOCKED`,
    { now: by.now, batch: STEP_BATCH },
  );
  for (const { id } of claimed) {
    await takeStep(services, tx, await readClaimed(services, tx, id), { kind: 'reportMissing' }, by);
  }
  return { done: claimed.length, more: claimed.length === STEP_BATCH };
}

/** Claims networks that have a passphrase in force and no open rotation, and plans their next change. */
async function planBatch(services: Services, tx: Tx, by: By): Promise<Batch> {
  const claimed = await services.db.rows<{ id: string }>(
    tx,
    `SELECT n.id FROM networks n JOIN log_heads h ON h.vessel_id = n.vessel_id
     WHERE n.removed_at IS NULL
       AND EXISTS (SELECT 1 FROM policies p WHERE p.network_id = n.id)
       AND EXISTS (SELECT 1 FROM passphrases x WHERE x.network_id = n.id AND x.live_at IS NOT NULL AND x.retired_at IS NULL)
       AND NOT EXISTS (SELECT 1 FROM rotations r WHERE r.network_id = n.id AND r.state IN
         ('planned','staged','handed_out','applying','unknown','needs_somebody','reconciling'))
     ORDER BY n.id LIMIT $batch FOR UPDATE OF n, h SKIP LOCKED`,
    { batch: STEP_BATCH },
  );
  let done = 0;
  for (const { id } of claimed) if (await replanNetwork(services, tx, id, by.now)) done += 1;
  // One that could not be planned would be claimed again at once.
  return { done, more: claimed.length === STEP_BATCH && done === claimed.length };
}

/** Between two looks; longer means the clock jumped or no server was running, in milliseconds. */
const LONG_GAP_MS = 24 * 3_600_000;
/** More than this many at once is a mass change that a person looks at first. Common practice, no source. */
const MASS = 50;

/** Notes this look; answers how long ago the last one was, by any server: 0 after a backward jump or the first time. */
async function timeSinceLastLook(services: Services): Promise<number> {
  const now = services.clock.now();
  return services.db.transaction({ kind: 'system' }, async (tx) => {
    await services.db.run(tx, 'INSERT INTO sweep_clock(last_at) VALUES ($now) ON CONFLICT DO NOTHING', {
      now,
    });
    const last = await services.db.row<{ last_at: Date }>(tx, 'SELECT last_at FROM sweep_clock FOR UPDATE');
    await services.db.run(tx, 'UPDATE sweep_clock SET last_at = $now', { now });
    return Math.max(0, now.getTime() - (last?.last_at.getTime() ?? now.getTime()));
  });
}

async function countDue(services: Services): Promise<number> {
  const row = await services.db.transaction({ kind: 'system' }, (tx) =>
    services.db.row<{ due: string }>(
      tx,
      "SELECT count(*) AS due FROM rotations WHERE state = 'staged' AND driver <> 'by_hand' AND due_at <= $now",
      { now: services.clock.now() },
    ),
  );
  return Number(row?.due ?? 0);
}

/**
 * Claims changes that a boat was asked to carry out before an instant and asks again: the server that had the
 * order may have been paused or cut off with it in hand. Repeats do no harm; a claim that another server holds is
 * passed over.
 */
async function askAgainBatch(services: Services, tx: Tx, by: By, before: Date): Promise<Batch> {
  const claimed = await services.db.rows<{ id: string }>(
    tx,
    `SELECT r.id FROM rotations r JOIN networks n ON n.id = r.network_id JOIN log_heads h ON h.vessel_id = r.vessel_id
     WHERE r.state IN ('handed_out','applying') AND r.driver = 'rehearsal' AND coalesce(r.asked_at, r.handed_out_at) < $before
     ORDER BY r.report_by LIMIT $batch FOR UPDATE OF r, n, h SKIP LOCKED`,
    { before, batch: STEP_BATCH },
  );
  for (const { id } of claimed) await enqueueCarryOut(services, tx, await readClaimed(services, tx, id));
  await services.db.run(
    tx,
    'UPDATE rotations SET asked_at = greatest($now::timestamptz, $before::timestamptz) WHERE id = ANY($ids::uuid[])',
    {
      now: by.now,
      before,
      ids: claimed.map(({ id }) => id),
    },
  );
  return { done: claimed.length, more: claimed.length === STEP_BATCH };
}

/** After a start: boats that were in the middle when this server stopped are asked again at once. */
export async function resumeDeliveries(services: Services): Promise<number> {
  const started = services.clock.now();
  return inBatches(services, (each, tx, by) => askAgainBatch(each, tx, by, started));
}
