import type { RotationState } from '../../shared/api/common.ts';
import type { PlanReason } from '../../shared/api/rotations.ts';
import type { Audience } from '../../shared/rules/permissions.ts';
import type { Evidence, Rotation, Seen, Way } from '../../shared/rules/rotation.ts';
import type { WifiSecurity } from '../../shared/rules/wifi.ts';
import type { Tx } from '../db/connection.ts';
import { notFound } from '../errors.ts';
import { lockLog } from '../handovers/lockLog.ts';
import type { Services } from '../services.ts';

/** A rotation as the rules see it, with what the server knows around it. */
export interface KnownRotation {
  readonly id: string;
  readonly vesselId: string;
  readonly networkId: string;
  readonly ssid: string;
  readonly audience: Audience;
  readonly security: WifiSecurity;
  readonly hidden: boolean;
  readonly carriesEquipment: boolean;
  readonly plannedBy: 'plan' | 'person';
  readonly reasons: readonly PlanReason[];
  readonly deadlineAt: Date | null;
  readonly occurrence: string | null;
  readonly rotation: Rotation;
}

interface RotationRow {
  id: string;
  vessel_id: string;
  network_id: string;
  ssid: string;
  audience: Audience;
  security: WifiSecurity;
  hidden: boolean;
  carries_equipment: boolean;
  state: RotationState;
  mode: 'graceful' | 'urgent';
  driver: 'by_hand' | 'rehearsal';
  epoch: number;
  ticket: string | null;
  from_passphrase_id: string | null;
  to_passphrase_id: string | null;
  planned_by: 'plan' | 'person';
  reasons: PlanReason[];
  due_at: Date;
  takes_over: boolean;
  deadline_at: Date | null;
  occurrence: string | null;
  handed_out_at: Date | null;
  report_by: Date | null;
  detail: string | null;
  waived_by: string | null;
}

/**
 * Takes the locks of one rotation in the order every writer keeps (log head, network, rotation), so that two
 * cannot wait for each other, and reads it as it is under them. Throws `not_found` for another vessel's.
 */
export async function lockRotation(
  services: Services,
  tx: Tx,
  vesselId: string,
  rotationId: string,
): Promise<KnownRotation> {
  await lockLog(services, tx, vesselId);
  return readLocked(services, tx, 'r.id = $id AND r.vessel_id = $vessel', {
    id: rotationId,
    vessel: vesselId,
  });
}

/** Reads a rotation whose locks the caller's claim holds already. */
export async function readClaimed(services: Services, tx: Tx, rotationId: string): Promise<KnownRotation> {
  return readLocked(services, tx, 'r.id = $id', { id: rotationId });
}

async function readLocked(
  services: Services,
  tx: Tx,
  where: string,
  bind: Record<string, unknown>,
): Promise<KnownRotation> {
  const { db } = services;
  const row = await db.row<RotationRow>(
    tx,
    `SELECT r.*, n.ssid, n.audience, n.security, n.hidden, n.carries_equipment
     FROM rotations r JOIN networks n ON n.id = r.network_id WHERE ${where} FOR UPDATE OF n, r`,
    bind,
  );
  if (!row) throw notFound();
  const targets = await db.rows<{ access_point_id: string; seen: Seen | null; evidence: Evidence | null }>(
    tx,
    `SELECT t.access_point_id, t.seen, t.evidence FROM rotation_targets t JOIN access_points a ON a.id = t.access_point_id
     WHERE t.rotation_id = $id ORDER BY a.position, a.name, a.id`,
    { id: row.id },
  );
  const ways = await db.rows<{ way: Way }>(
    tx,
    'SELECT way FROM rotation_ways WHERE rotation_id = $id ORDER BY at',
    {
      id: row.id,
    },
  );
  return {
    id: row.id,
    vesselId: row.vessel_id,
    networkId: row.network_id,
    ssid: row.ssid,
    audience: row.audience,
    security: row.security,
    hidden: row.hidden,
    carriesEquipment: row.carries_equipment,
    plannedBy: row.planned_by,
    reasons: row.reasons,
    deadlineAt: row.deadline_at,
    occurrence: row.occurrence,
    rotation: {
      state: row.state,
      mode: row.mode,
      driver: row.driver,
      ticket: row.ticket === null ? null : { epoch: row.epoch, number: Number(row.ticket) },
      from: row.from_passphrase_id,
      to: row.to_passphrase_id,
      dueAt: row.due_at,
      takesOver: row.takes_over,
      handedOutAt: row.handed_out_at,
      reportBy: row.report_by,
      targets: targets.map((target) => ({
        accessPointId: target.access_point_id,
        seen: target.seen,
        evidence: target.evidence,
      })),
      ways: ways.map(({ way }) => way),
      waivedBy: row.waived_by,
      detail: row.detail,
    },
  };
}

/** Locks a network for a verb about its rotations. Throws `not_found` for another vessel's or a removed one. */
export async function lockNetwork(
  services: Services,
  tx: Tx,
  vesselId: string,
  networkId: string,
): Promise<{
  id: string;
  audience: Audience;
  carriesEquipment: boolean;
  driver: 'by_hand' | 'rehearsal';
  epoch: number;
}> {
  await lockLog(services, tx, vesselId);
  const row = await services.db.row<{
    id: string;
    audience: Audience;
    carries_equipment: boolean;
    driver: 'by_hand' | 'rehearsal';
    epoch: number;
  }>(
    tx,
    `SELECT n.id, n.audience, n.carries_equipment, v.driver, v.epoch FROM networks n JOIN vessels v ON v.id = n.vessel_id
     WHERE n.id = $network AND n.vessel_id = $vessel AND n.removed_at IS NULL FOR UPDATE OF n`,
    { network: networkId, vessel: vesselId },
  );
  if (!row) throw notFound();
  return {
    id: row.id,
    audience: row.audience,
    carriesEquipment: row.carries_equipment,
    driver: row.driver,
    epoch: row.epoch,
  };
}
