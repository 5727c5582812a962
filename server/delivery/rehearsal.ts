import { z } from 'zod';
import { id } from '../../shared/api/common.ts';
import { isVerified } from '../../shared/rules/rotation.ts';
import type { Tx } from '../db/connection.ts';
import { faultPoint } from '../faultPoint.ts';
import { appendLog } from '../handovers/appendLog.ts';
import type { By } from '../rotations/by.ts';
import { type KnownRotation, lockRotation } from '../rotations/lockRotation.ts';
import { observe } from '../rotations/observe.ts';
import { rotationEvent, takeStep } from '../rotations/takeStep.ts';
import type { Services } from '../services.ts';

const order = z.object({ rotationId: id, epoch: z.number().int(), ticket: z.number().int() });

/**
 * Carries a change out on a pretended boat, through the same steps and the same rules as every other: its journal
 * takes the order, its officer opens it, then access point by access point the passphrase is set and read
 * back. Silent access points never answer. Each step is its own transaction and looks at the state again
 * first, so a repeat, a twin or a crash in the middle changes nothing that was done.
 */
export async function carryOut(services: Services, data: unknown): Promise<void> {
  const { rotationId, epoch, ticket } = order.parse(data);
  const inStep = <T>(work: (tx: Tx, known: KnownRotation, by: By) => Promise<T>) =>
    services.db.transaction({ kind: 'system' }, async (tx) => {
      const row = await services.db.row<{ vessel_id: string }>(
        tx,
        'SELECT vessel_id FROM rotations WHERE id = $id',
        {
          id: rotationId,
        },
      );
      if (!row) return null;
      const known = await lockRotation(services, tx, row.vessel_id, rotationId);
      const own = known.rotation.ticket;
      if (own === null || own.epoch !== epoch || own.number !== ticket) return null;
      if (!UNDER_WAY.includes(known.rotation.state)) return null;
      return work(tx, known, { now: services.clock.now(), actor: null });
    });

  const targets = await inStep((tx, known, by) => begin(services, tx, known, by));
  faultPoint('S7');
  for (const accessPointId of targets ?? []) {
    const set = await inStep((tx, known) => setPretended(services, tx, known, accessPointId));
    faultPoint('S8');
    if (!set) continue;
    await inStep((tx, known, by) => readBack(services, tx, known, accessPointId, by));
    faultPoint('S10');
  }
}

const UNDER_WAY: readonly string[] = ['handed_out', 'applying', 'unknown'];

/** Journal and officer confirm; answers the access points still to do. */
async function begin(services: Services, tx: Tx, known: KnownRotation, by: By): Promise<string[]> {
  let now = known;
  for (const way of ['journal', 'officer'] as const) {
    if (now.rotation.ways.includes(way)) continue;
    now = await takeStep(services, tx, now, { kind: 'disclose', way }, by);
    if (way === 'officer') {
      await appendLog(services, tx, [rotationEvent(now, 'rotation.sheet_opened', by, { rehearsal: true })]);
    }
  }
  if (now.rotation.state !== 'applying') now = await takeStep(services, tx, now, { kind: 'begin' }, by);
  return now.rotation.targets.filter((target) => !isVerified(target)).map((target) => target.accessPointId);
}

/** Sets the pretended access point; false when it does not answer. Setting what is set already changes nothing. */
async function setPretended(
  services: Services,
  tx: Tx,
  known: KnownRotation,
  accessPointId: string,
): Promise<boolean> {
  const [row] = await services.db.run<{ silent: boolean }>(
    tx,
    `INSERT INTO rehearsal_access_points AS a (access_point_id, network_id, vessel_id, passphrase_id)
     VALUES ($accessPoint, $network, $vessel, $to)
     ON CONFLICT (access_point_id, network_id) DO UPDATE
       SET passphrase_id = CASE WHEN a.silent THEN a.passphrase_id ELSE excluded.passphrase_id END
     RETURNING silent`,
    { accessPoint: accessPointId, network: known.networkId, vessel: known.vesselId, to: known.rotation.to },
  );
  return row !== undefined && !row.silent;
}

/** Reads back what the pretended access point runs and reports it, once for each access point and ticket. */
async function readBack(
  services: Services,
  tx: Tx,
  known: KnownRotation,
  accessPointId: string,
  by: By,
): Promise<void> {
  const { ticket, to, from } = known.rotation;
  const row = await services.db.row<{ passphrase_id: string }>(
    tx,
    'SELECT passphrase_id FROM rehearsal_access_points WHERE access_point_id = $accessPoint AND network_id = $network',
    { accessPoint: accessPointId, network: known.networkId },
  );
  if (!row || !ticket) return;
  const seen = row.passphrase_id === to ? 'new' : row.passphrase_id === from ? 'old' : 'other';
  const sequence = known.rotation.targets.findIndex((target) => target.accessPointId === accessPointId) + 1;
  await observe(
    services,
    tx,
    known,
    ticket,
    { accessPointId, seen, evidence: 'E1' },
    { reporter: 'rehearsal', boot: `${known.id} ${ticket.number}`, sequence },
    by,
  );
  faultPoint('S9');
}
