import { randomUUID } from 'node:crypto';
import { generate } from '../passphrases/generate.ts';
import { sealPassphrase } from '../passphrases/sealPassphrase.ts';
import { minutes } from './calendar.ts';
import { type LaidVessel, type Laying, networkOf } from './laying.ts';
import { rounded } from './passphrases.ts';

const DAY = 1440;

/** The guest network's change that the boat fell silent in: two access points changed, two not known. */
export async function laySilentChange(laying: Laying, vessel: LaidVessel, silentSince: Date): Promise<void> {
  const { services, tx, rows, log } = laying;
  const network = networkOf(vessel, 'guest');
  await rows.write(services, tx);
  const made = generate();
  const due = minutes(silentSince, -4);
  const to = await sealPassphrase(services, tx, {
    vesselId: vessel.id,
    networkId: network.id,
    passphrase: made.passphrase,
    origin: 'generated',
    bits: rounded(made.bits),
    now: minutes(due, -DAY),
  });
  const id = randomUUID();
  const ticket = 3;
  const steps = {
    staged: minutes(due, -DAY),
    handedOut: minutes(due, -30),
    applying: due,
    reportBy: minutes(due, 30),
  };
  rows.add('rotations', {
    id,
    vessel_id: vessel.id,
    network_id: network.id,
    state: 'unknown',
    mode: 'graceful',
    driver: 'rehearsal',
    epoch: 1,
    ticket,
    from_passphrase_id: network.passphraseId,
    to_passphrase_id: to,
    planned_by: 'plan',
    reasons: [
      { code: 'departed_guest', at: minutes(due, -2 * DAY).toISOString() },
      { code: 'overdue', since: minutes(network.liveAt, network.limitDays * DAY).toISOString() },
    ],
    due_at: due,
    deadline_at: minutes(network.liveAt, network.limitDays * DAY),
    staged_at: steps.staged,
    handed_out_at: steps.handedOut,
    applying_at: steps.applying,
    report_by: steps.reportBy,
    created_at: minutes(due, -3 * DAY),
    updated_at: steps.reportBy,
  });
  for (const way of ['journal', 'officer']) {
    rows.add('rotation_ways', { rotation_id: id, vessel_id: vessel.id, way, at: minutes(due, -20) });
  }
  vessel.accessPointIds.forEach((accessPointId, index) => {
    const reached = index < 2;
    rows.add('rotation_targets', {
      rotation_id: id,
      access_point_id: accessPointId,
      vessel_id: vessel.id,
      seen: reached ? 'new' : null,
      evidence: reached ? 'E1' : null,
      seen_at: reached ? minutes(due, index + 1) : null,
    });
    if (!reached) return;
    rows.add('observations', {
      id: randomUUID(),
      rotation_id: id,
      access_point_id: accessPointId,
      vessel_id: vessel.id,
      epoch: 1,
      ticket,
      seen: 'new',
      evidence: 'E1',
      reporter: 'rehearsal',
      boot: 'laid',
      sequence: index + 1,
      at: minutes(due, index + 1),
    });
  });
  const subject = { kind: 'rotation', id } as const;
  const about = {
    vesselId: vessel.id,
    networkId: network.id,
    passphraseId: to,
    subject,
    body: { audience: 'guest', ticket },
  };
  log.push(
    { ...about, kind: 'rotation.staged', at: steps.staged },
    { ...about, kind: 'rotation.handed_out', at: steps.handedOut },
    { ...about, kind: 'rotation.applying', at: steps.applying },
    { ...about, kind: 'rotation.unknown', at: steps.reportBy },
  );
  await rows.write(services, tx);
  const reached = vessel.accessPointIds.slice(0, 2);
  await services.db.run(
    tx,
    `UPDATE rehearsal_access_points SET silent = true,
       passphrase_id = CASE WHEN network_id = $network AND access_point_id = ANY($reached::uuid[]) THEN $to ELSE passphrase_id END
     WHERE vessel_id = $vessel`,
    { vessel: vessel.id, network: network.id, reached, to },
  );
}
