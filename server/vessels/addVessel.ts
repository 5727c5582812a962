import { randomUUID } from 'node:crypto';
import type { z } from 'zod';
import type { newVesselBody } from '../../shared/api/vessels.ts';
import { invite } from '../auth/invitations.ts';
import type { Tx } from '../db/connection.ts';
import { invalid } from '../errors.ts';
import { appendLog } from '../handovers/appendLog.ts';
import type { Actor } from '../http/session.ts';
import type { Services } from '../services.ts';
import { isZone } from './changeVessel.ts';

/**
 * A dealer begins to look after a vessel: she is written down with ship's time, and her captain gets the only
 * role there is for now, by a mail. The dealer's own scope cannot write, so the transaction is narrowed to the
 * new vessel alone before anything is.
 */
export async function addVessel(
  given: { services: Services; tx: Tx; actor: Actor; now: Date },
  body: z.output<typeof newVesselBody>,
): Promise<{ vesselId: string; name: string; invited: string }> {
  const { services, tx, actor, now } = given;
  if (!isZone(body.zone)) throw invalid({ zone: ['Choose a zone of the IANA list, such as Europe/Zagreb'] });
  const vesselId = randomUUID();
  await services.db.setScope(tx, { kind: 'vessel', vesselId });
  await services.db.run(
    tx,
    `INSERT INTO vessels(id, dealer_id, name, kind, home_port, serial_prefix, created_at, updated_at)
     VALUES ($id, $dealer, $name, $kind, $homePort, $prefix, $now, $now)`,
    {
      id: vesselId,
      dealer: actor.dealerId,
      name: body.name,
      kind: body.kind,
      homePort: body.homePort,
      prefix: /[A-Z]/.exec(body.name.toUpperCase())?.[0] ?? 'M',
      now,
    },
  );
  await services.db.run(
    tx,
    'INSERT INTO ship_zones(id, vessel_id, zone, from_at) VALUES ($id, $vessel, $zone, $now)',
    { id: randomUUID(), vessel: vesselId, zone: body.zone, now },
  );
  const by = { id: actor.personId, name: actor.name };
  await appendLog(services, tx, [
    { vesselId, kind: 'vessel.added', at: now, actor: by, body: { zone: body.zone } },
  ]);
  await invite(services, tx, {
    vesselId,
    email: body.captain.email,
    name: body.captain.name,
    roles: ['captain'],
    by,
  });
  return { vesselId, name: body.name, invited: body.captain.email };
}
