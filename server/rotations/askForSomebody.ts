import { zoneAt } from '../../shared/rules/shipTime.ts';
import type { Tx } from '../db/connection.ts';
import { queueMail } from '../mail/queueMail.ts';
import type { Services } from '../services.ts';
import type { By } from './by.ts';
import type { KnownRotation } from './lockRotation.ts';
import { takeStep } from './takeStep.ts';

/**
 * Marks a change as waiting for somebody, with what to do, and writes to the captain and the ETO: once each
 * for a change, however often it comes to this. The mail says when and where, never what.
 */
export async function askForSomebody(
  services: Services,
  tx: Tx,
  known: KnownRotation,
  why: string,
  by: By,
): Promise<KnownRotation> {
  const asked = await takeStep(services, tx, known, { kind: 'needSomebody', why }, by);
  const { db } = services;
  const vessel = await db.row<{ name: string }>(tx, 'SELECT name FROM vessels WHERE id = $vessel', {
    vessel: known.vesselId,
  });
  const zones = await db.rows<{ zone: string; fromAt: Date }>(
    tx,
    'SELECT zone, from_at AS "fromAt" FROM ship_zones WHERE vessel_id = $vessel',
    { vessel: known.vesselId },
  );
  const people = await db.rows<{ id: string; email: string }>(
    tx,
    `SELECT DISTINCT p.id, p.email FROM memberships m JOIN people p ON p.id = m.person_id
     WHERE m.vessel_id = $vessel AND m.role IN ('captain','eto') AND m.ended_at IS NULL AND m.suspended_at IS NULL
       AND (m.ends_at IS NULL OR m.ends_at > $now) AND p.disabled_at IS NULL ORDER BY p.id`,
    { vessel: known.vesselId, now: by.now },
  );
  for (const person of people) {
    await queueMail(services, tx, {
      kind: 'change_needs_somebody',
      to: person.email,
      messageKey: `change_needs_somebody ${known.id} ${person.id}`,
      vesselId: known.vesselId,
      data: {
        vessel: vessel?.name ?? '',
        network: known.ssid,
        dueAt: known.rotation.dueAt.toISOString(),
        zone: zoneAt(zones, known.rotation.dueAt),
        why,
        path: `/vessels/${known.vesselId}/changes/${known.id}`,
      },
    });
  }
  return asked;
}
