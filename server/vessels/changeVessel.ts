import { randomUUID } from 'node:crypto';
import { Temporal } from 'temporal-polyfill';
import type { z } from 'zod';
import type { Source } from '../../shared/api/common.ts';
import type {
  setAccessPoints as setAccessPointsContract,
  setCabins as setCabinsContract,
  vesselBody,
} from '../../shared/api/vessels.ts';
import { shipInstant } from '../../shared/rules/shipTime.ts';
import { AppError, invalid, notFound } from '../errors.ts';
import { appendLog } from '../handovers/appendLog.ts';
import { lockLog } from '../handovers/lockLog.ts';
import { replanNetwork } from '../rotations/replan.ts';
import type { Change } from './change.ts';
import { shipZones } from './readVessel.ts';

const by = ({ actor }: Change) => ({ id: actor.personId, name: actor.name });

async function logChange(change: Change, what: string): Promise<void> {
  await appendLog(change.services, change.tx, [
    { vesselId: change.vesselId, kind: 'vessel.changed', at: change.now, actor: by(change), body: { what } },
  ]);
}

/** Looks at every network's plan again, after something it depends on changed. */
export async function replanVessel({
  services,
  tx,
  vesselId,
  now,
}: Pick<Change, 'services' | 'tx' | 'vesselId' | 'now'>): Promise<void> {
  const networks = await services.db.rows<{ id: string }>(
    tx,
    'SELECT id FROM networks WHERE vessel_id = $vessel AND removed_at IS NULL ORDER BY id',
    { vessel: vesselId },
  );
  for (const { id } of networks) await replanNetwork(services, tx, id, now);
}

/** Stores the vessel's settings. Throws `conflict` when somebody else changed them since they were read. */
export async function changeVessel(change: Change, body: z.output<typeof vesselBody>): Promise<void> {
  const { services, tx, vesselId, now } = change;
  const changed = await services.db.run(
    tx,
    `UPDATE vessels SET name = $name, kind = $kind, length_m = $lengthM, guests_max = $guestsMax, home_port = $homePort,
       owner_name = $ownerName, lying = $lying, source = $source, retention_days = $retentionDays,
       second_factor_roles = $secondFactorRoles::text[], serial_prefix = $serialPrefix, updated_at = $now
     WHERE id = $vessel AND date_trunc('milliseconds', updated_at) = $updatedAt RETURNING 1`,
    { ...body, vessel: vesselId, now },
  );
  if (changed.length === 0) {
    throw new AppError(
      'conflict',
      'Somebody changed these settings while you were editing. Reload the page, then make your change again.',
    );
  }
  await logChange(change, 'settings');
}

/** Says what feeds the boat now and, where given, where she lies. */
export async function changeSource(
  change: Change,
  body: { source: Source; lying?: string | null | undefined },
): Promise<void> {
  const { services, tx, vesselId, now } = change;
  await services.db.run(
    tx,
    `UPDATE vessels SET source = $source, lying = CASE WHEN $moved THEN $lying ELSE lying END, updated_at = $now WHERE id = $vessel`,
    {
      source: body.source,
      moved: body.lying !== undefined,
      lying: body.lying ?? null,
      now,
      vessel: vesselId,
    },
  );
  await logChange(change, `source ${body.source}`);
}

const ZONES_MAX = 200;

/** Changes ship's time from a local date and time on; that time is read on the clock in force before it. */
export async function addZone(change: Change, body: { zone: string; fromLocal: string }): Promise<void> {
  const { services, tx, vesselId } = change;
  if (!isZone(body.zone)) throw invalid({ zone: ['Choose a zone of the IANA list, such as Europe/Zagreb'] });
  const zones = await shipZones(services, tx, vesselId);
  if (zones.length >= ZONES_MAX)
    throw invalid({ zone: [`At most ${ZONES_MAX} changes of ship's time are kept; take old ones away`] });
  const fromAt = shipInstant(zones, localTime(body.fromLocal));
  const first = zones[0];
  if (first && fromAt.getTime() < first.fromAt.getTime()) {
    throw invalid({ fromLocal: ['That is before the first time on record here. Choose a later date'] });
  }
  if (zones.some((span) => span.fromAt.getTime() === fromAt.getTime())) {
    throw invalid({ fromLocal: ["Ship's time already changes at that moment. Take that change away first"] });
  }
  await services.db.run(
    tx,
    'INSERT INTO ship_zones(id, vessel_id, zone, from_at) VALUES ($id, $vessel, $zone, $from)',
    {
      id: randomUUID(),
      vessel: vesselId,
      zone: body.zone,
      from: fromAt,
    },
  );
  await logChange(change, `ship's time ${body.zone} from ${fromAt.toISOString()}`);
  await replanVessel(change);
}

/** The date and time as given; the schema has seen its form, not whether the calendar has such a day. */
function localTime(text: string): Temporal.PlainDateTime {
  try {
    return Temporal.PlainDateTime.from(text);
  } catch (cause) {
    if (cause instanceof RangeError)
      throw invalid({ fromLocal: ['There is no such date or time. Choose one from the calendar'] });
    throw cause;
  }
}

/** Whether the zone is a name of the IANA list, and not an offset such as +02:00. */
export function isZone(zone: string): boolean {
  try {
    new Intl.DateTimeFormat('en', { timeZone: zone });
    return /^[A-Za-z]/.test(zone);
  } catch {
    return false;
  }
}

/** Takes a change of ship's time away. The first zone stays, since ship's time must be something. */
export async function removeZone(change: Change, zoneId: string): Promise<void> {
  const { services, tx, vesselId } = change;
  const rows = await services.db.rows<{ id: string }>(
    tx,
    'SELECT id FROM ship_zones WHERE vessel_id = $vessel ORDER BY from_at',
    { vessel: vesselId },
  );
  if (!rows.some(({ id }) => id === zoneId)) throw notFound();
  if (rows[0]?.id === zoneId)
    throw new AppError(
      'not_now',
      "The first zone stays: a ship's clock always shows something. Add the right one, then this one no longer matters.",
    );
  await services.db.run(tx, 'DELETE FROM ship_zones WHERE id = $id AND vessel_id = $vessel', {
    id: zoneId,
    vessel: vesselId,
  });
  await logChange(change, "ship's time");
  await replanVessel(change);
}

type CabinList = z.output<NonNullable<typeof setCabinsContract.body>>['cabins'];
type AccessPointList = z.output<NonNullable<typeof setAccessPointsContract.body>>['accessPoints'];

/** Each name twice in a list, as errors keyed by where it stands. */
function refuseTwice(list: string, items: readonly { readonly name: string }[]): void {
  const seen = new Set<string>();
  const errors: Record<string, string[]> = {};
  for (const [index, { name }] of items.entries()) {
    const key = name.toLocaleLowerCase('en');
    if (seen.has(key))
      errors[`${list}.${index}.name`] = [`“${name}” is in the list twice; give each its own name`];
    seen.add(key);
  }
  if (Object.keys(errors).length > 0) throw invalid(errors);
}

/** Sets the cabins in their order. Guests of a cabin that goes keep everything but the cabin. */
export async function setCabins(change: Change, cabins: CabinList): Promise<void> {
  refuseTwice('cabins', cabins);
  const { services, tx, vesselId } = change;
  await keepOnly(change, 'cabins', cabins);
  // Names may be swapped between cabins, so they all move out of the way first.
  await services.db.run(tx, "UPDATE cabins SET name = 'moving ' || id WHERE vessel_id = $vessel", {
    vessel: vesselId,
  });
  for (const [position, cabin] of cabins.entries()) {
    await services.db.run(
      tx,
      `INSERT INTO cabins(id, vessel_id, deck, name, position) VALUES ($id, $vessel, $deck, $name, $position)
       ON CONFLICT (id) DO UPDATE SET deck = excluded.deck, name = excluded.name, position = excluded.position`,
      { id: cabin.id ?? randomUUID(), vessel: vesselId, deck: cabin.deck, name: cabin.name, position },
    );
  }
  await logChange(change, 'cabins');
}

/** Sets the access points in their order. One that a change under way waits for cannot be taken away. */
export async function setAccessPoints(change: Change, accessPoints: AccessPointList): Promise<void> {
  refuseTwice('accessPoints', accessPoints);
  const { services, tx, vesselId, now } = change;
  await lockLog(services, tx, vesselId);
  await keepOnly(change, 'access_points', accessPoints);
  await services.db.run(
    tx,
    "UPDATE access_points SET name = left('moving ' || id, 60) WHERE vessel_id = $vessel AND removed_at IS NULL",
    { vessel: vesselId },
  );
  for (const [position, one] of accessPoints.entries()) {
    await services.db.run(
      tx,
      `INSERT INTO access_points(id, vessel_id, name, deck, position) VALUES ($id, $vessel, $name, $deck, $position)
       ON CONFLICT (id) DO UPDATE SET name = excluded.name, deck = excluded.deck, position = excluded.position`,
      { id: one.id ?? randomUUID(), vessel: vesselId, name: one.name, deck: one.deck, position },
    );
  }
  await appendLog(services, tx, [
    {
      vesselId,
      kind: 'access_point.changed',
      at: now,
      actor: by(change),
      body: { count: accessPoints.length },
    },
  ]);
}

/** Drops what is no longer listed, and refuses an id that is not this vessel's. */
async function keepOnly(
  change: Change,
  table: 'cabins' | 'access_points',
  items: readonly { readonly id?: string | undefined }[],
): Promise<void> {
  const { services, tx, vesselId, now } = change;
  const kept = items.flatMap(({ id }) => (id ? [id] : []));
  const bind = { vessel: vesselId, kept };
  if (table === 'cabins') {
    const known = await services.db.rows<{ id: string }>(
      tx,
      'SELECT id FROM cabins WHERE vessel_id = $vessel AND id = ANY($kept::uuid[])',
      bind,
    );
    if (known.length !== new Set(kept).size) throw notFound();
    await services.db.run(
      tx,
      'DELETE FROM cabins WHERE vessel_id = $vessel AND NOT id = ANY($kept::uuid[])',
      bind,
    );
    return;
  }
  const known = await services.db.rows<{ id: string }>(
    tx,
    'SELECT id FROM access_points WHERE vessel_id = $vessel AND removed_at IS NULL AND id = ANY($kept::uuid[])',
    bind,
  );
  if (known.length !== new Set(kept).size) throw notFound();
  const waiting = await services.db.row<{ name: string }>(
    tx,
    `SELECT a.name FROM access_points a JOIN rotation_targets t ON t.access_point_id = a.id JOIN rotations r ON r.id = t.rotation_id
     WHERE a.vessel_id = $vessel AND a.removed_at IS NULL AND NOT a.id = ANY($kept::uuid[])
       AND r.state IN ('staged','handed_out','applying','unknown','needs_somebody','reconciling') LIMIT 1`,
    bind,
  );
  if (waiting)
    throw new AppError(
      'not_now',
      `A change is ready for “${waiting.name}” or under way on it. Finish, cancel or give up that change before taking it away.`,
    );
  await services.db.run(
    tx,
    'UPDATE access_points SET removed_at = $now WHERE vessel_id = $vessel AND removed_at IS NULL AND NOT id = ANY($kept::uuid[])',
    { ...bind, now },
  );
}
