import type { Tx } from '../db/connection.ts';
import type { Services } from '../services.ts';
import type { By } from './by.ts';
import type { KnownRotation } from './lockRotation.ts';
import { takeStep } from './takeStep.ts';

/** How long the boat has to report before the state is not known, in milliseconds. Common practice, no source. */
export const BOAT_REPORTS_WITHIN_MS = 15 * 60_000;
/** And somebody with the entry sheet open, in milliseconds. Common practice, no source. */
export const SHEET_REPORTS_WITHIN_MS = 24 * 3_600_000;

/** When the crossing that is on at an instant ends; null when none is. */
export async function crossingUntil(
  services: Services,
  tx: Tx,
  vesselId: string,
  at: Date,
): Promise<Date | null> {
  const row = await services.db.row<{ ends_at: Date }>(
    tx,
    `SELECT ends_at FROM voyages WHERE vessel_id = $vessel AND kind = 'crossing' AND starts_at <= $at AND ends_at > $at
     ORDER BY ends_at DESC LIMIT 1`,
    { vessel: vesselId, at },
  );
  return row?.ends_at ?? null;
}

/**
 * Hands a staged change to whoever carries it out aboard, from the same transaction that says so: the job that
 * does it exists only once "handed out" is committed.
 */
export async function handOutToBoat(
  services: Services,
  tx: Tx,
  known: KnownRotation,
  by: By,
): Promise<KnownRotation> {
  const crossing =
    known.carriesEquipment && (await crossingUntil(services, tx, known.vesselId, by.now)) !== null;
  const reportBy = new Date(by.now.getTime() + BOAT_REPORTS_WITHIN_MS);
  const handed = await takeStep(services, tx, known, { kind: 'handOut', reportBy, crossing }, by);
  await enqueueCarryOut(services, tx, handed);
  return handed;
}

export async function enqueueCarryOut(services: Services, tx: Tx, known: KnownRotation): Promise<void> {
  const { ticket } = known.rotation;
  if (!ticket) return;
  await services.enqueue(tx, 'rehearsal.carryOut', {
    rotationId: known.id,
    epoch: ticket.epoch,
    ticket: ticket.number,
  });
}
