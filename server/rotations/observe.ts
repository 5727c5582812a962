import { randomUUID } from 'node:crypto';
import type { Observation, Ticket } from '../../shared/rules/rotation.ts';
import type { Tx } from '../db/connection.ts';
import { appendLog } from '../handovers/appendLog.ts';
import type { Services } from '../services.ts';
import type { By } from './by.ts';
import type { KnownRotation } from './lockRotation.ts';
import { rotationEvent, takeStep } from './takeStep.ts';

/** Who reports, since which start, and the how-manieth report: a repeat of the same three changes nothing. */
export interface Reporter {
  readonly reporter: string;
  readonly boot: string;
  readonly sequence: number;
}

/**
 * Takes a report about one access point of a locked rotation: stored once, judged by the rules, logged. A
 * repeat answers the rotation as it is. Throws `conflict` for a report about another ticket.
 */
export async function observe(
  services: Services,
  tx: Tx,
  known: KnownRotation,
  ticket: Ticket,
  seen: Observation,
  reporter: Reporter,
  by: By,
): Promise<KnownRotation> {
  const stored = await services.db.run(
    tx,
    `INSERT INTO observations(id, rotation_id, access_point_id, vessel_id, epoch, ticket, seen, evidence, reporter, boot, sequence, at)
     VALUES ($id, $rotation, $accessPoint, $vessel, $epoch, $ticket, $seen, $evidence, $reporter, $boot, $sequence, $now)
     ON CONFLICT DO NOTHING RETURNING id`,
    {
      id: randomUUID(),
      rotation: known.id,
      accessPoint: seen.accessPointId,
      vessel: known.vesselId,
      epoch: ticket.epoch,
      ticket: ticket.number,
      seen: seen.seen,
      evidence: seen.evidence,
      ...reporter,
      now: by.now,
    },
  );
  if (stored.length === 0) return known;
  await appendLog(services, tx, [
    {
      ...rotationEvent(known, 'rotation.access_point', by, { seen: seen.seen, evidence: seen.evidence }),
      subject: { kind: 'access_point', id: seen.accessPointId },
    },
  ]);
  return takeStep(services, tx, known, { kind: 'observe', ticket, ...seen }, by);
}

/** The next number of a person's own reports about one rotation. */
export async function personReporter(
  services: Services,
  tx: Tx,
  known: KnownRotation,
  personId: string,
): Promise<Reporter> {
  const reporter = `person ${personId}`;
  const row = await services.db.row<{ next: string }>(
    tx,
    `SELECT coalesce(max(sequence), 0) + 1 AS next FROM observations
     WHERE vessel_id = $vessel AND reporter = $reporter AND boot = $boot`,
    { vessel: known.vesselId, reporter, boot: known.id },
  );
  return { reporter, boot: known.id, sequence: Number(row?.next ?? 1) };
}
