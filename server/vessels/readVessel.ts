import type { Source } from '../../shared/api/common.ts';
import type { VesselHead, VesselSettings } from '../../shared/api/vessels.ts';
import { type Audience, may, type VesselRole } from '../../shared/rules/permissions.ts';
import { shipInstant, shipTime, type ZoneSpan, zoneAt } from '../../shared/rules/shipTime.ts';
import type { Tx } from '../db/connection.ts';
import { notFound } from '../errors.ts';
import type { Services } from '../services.ts';

/** Ship's time of a vessel: its zones, earliest first. */
export function shipZones(services: Services, tx: Tx, vesselId: string): Promise<ZoneSpan[]> {
  return services.db.rows<ZoneSpan>(
    tx,
    'SELECT zone, from_at AS "fromAt" FROM ship_zones WHERE vessel_id = $vessel ORDER BY from_at',
    { vessel: vesselId },
  );
}

/** The instants at which the ship's today begins and ends. */
export function shipDay(zones: readonly ZoneSpan[], now: Date): { from: Date; until: Date } {
  const midnight = shipTime(zones, now).toPlainDate().toPlainDateTime();
  return { from: shipInstant(zones, midnight), until: shipInstant(zones, midnight.add({ days: 1 })) };
}

/** What every page shows at its head. Changes of the day only for those who may see networks. */
export async function readVessel(
  services: Services,
  tx: Tx,
  given: { vesselId: string; roles: readonly VesselRole[]; now: Date },
): Promise<VesselHead> {
  const { db } = services;
  const { vesselId, now } = given;
  const row = await db.row<{ id: string; name: string; lying: string | null; source: Source }>(
    tx,
    'SELECT id, name, lying, source FROM vessels WHERE id = $vessel',
    { vessel: vesselId },
  );
  if (!row) throw notFound();
  const zones = await shipZones(services, tx, vesselId);
  const day = shipDay(zones, now);
  const changes = may(given.roles, 'networks.view')
    ? await db.rows<{ at: Date; ssid: string; audience: Audience; done: boolean }>(
        tx,
        `SELECT coalesce(r.live_at, r.due_at) AS at, n.ssid, n.audience, r.live_at IS NOT NULL AS done
         FROM rotations r JOIN networks n ON n.id = r.network_id
         WHERE r.vessel_id = $vessel AND n.removed_at IS NULL AND r.state NOT IN ('cancelled','superseded')
           AND coalesce(r.live_at, r.due_at) >= $from AND coalesce(r.live_at, r.due_at) < $until ORDER BY 1`,
        { vessel: vesselId, ...day },
      )
    : [];
  return {
    id: row.id,
    name: row.name,
    lying: row.lying,
    source: row.source,
    zone: zoneAt(zones, now),
    changesToday: changes.map(({ at, ssid, audience, done }) => ({
      at: at.toISOString(),
      network: ssid,
      audience,
      done,
    })),
  };
}

interface SettingsRow {
  id: string;
  name: string;
  kind: string;
  length_m: string | null;
  guests_max: number | null;
  home_port: string | null;
  owner_name: string | null;
  lying: string | null;
  source: Source;
  retention_days: number;
  second_factor_roles: VesselRole[];
  serial_prefix: string;
  driver: 'by_hand' | 'rehearsal';
  dealer: string | null;
  updated_at: Date;
}

/** All settings of a vessel. */
export async function readSettings(services: Services, tx: Tx, vesselId: string): Promise<VesselSettings> {
  const { db } = services;
  const bind = { vessel: vesselId };
  const row = await db.row<SettingsRow>(
    tx,
    `SELECT v.*, d.name AS dealer FROM vessels v LEFT JOIN dealers d ON d.id = v.dealer_id WHERE v.id = $vessel`,
    bind,
  );
  if (!row) throw notFound();
  const zones = await db.rows<{ id: string; zone: string; from_at: Date }>(
    tx,
    'SELECT id, zone, from_at FROM ship_zones WHERE vessel_id = $vessel ORDER BY from_at',
    bind,
  );
  const cabins = await db.rows<{ id: string; deck: string; name: string }>(
    tx,
    'SELECT id, deck, name FROM cabins WHERE vessel_id = $vessel ORDER BY position, name',
    bind,
  );
  const accessPoints = await db.rows<{ id: string; name: string; deck: string | null }>(
    tx,
    'SELECT id, name, deck FROM access_points WHERE vessel_id = $vessel AND removed_at IS NULL ORDER BY position, name',
    bind,
  );
  return {
    id: row.id,
    name: row.name,
    kind: row.kind,
    lengthM: row.length_m === null ? null : Number(row.length_m),
    guestsMax: row.guests_max,
    homePort: row.home_port,
    ownerName: row.owner_name,
    lying: row.lying,
    source: row.source,
    retentionDays: row.retention_days,
    secondFactorRoles: row.second_factor_roles,
    serialPrefix: row.serial_prefix,
    driver: row.driver,
    dealer: row.dealer,
    zones: zones.map(({ id, zone, from_at }) => ({ id, zone, fromAt: from_at.toISOString() })),
    cabins: cabins.map(({ id, deck, name }) => ({ id, deck, name })),
    accessPoints: accessPoints.map(({ id, name, deck }) => ({ id, name, deck })),
    updatedAt: row.updated_at.toISOString(),
  };
}
