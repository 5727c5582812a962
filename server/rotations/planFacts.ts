import type { Audience } from '../../shared/rules/permissions.ts';
import type { PlanInput } from '../../shared/rules/planning.ts';
import type { QuietHours } from '../../shared/rules/quietHours.ts';
import type { Tx } from '../db/connection.ts';
import type { Services } from '../services.ts';

/** Parties and voyages looked at: those that ended at most this long ago, in milliseconds. */
const BACK_MS = 30 * 86_400_000;

export interface PlanFacts {
  readonly vesselId: string;
  readonly driver: 'by_hand' | 'rehearsal';
  readonly epoch: number;
  readonly input: PlanInput;
}

interface NetworkRow {
  vessel_id: string;
  audience: Audience;
  carries_equipment: boolean;
  driver: 'by_hand' | 'rehearsal';
  epoch: number;
  age_limit_days: number;
  quiet_hours: QuietHours[];
  on_party_departure: boolean;
  on_sign_off: boolean;
  on_lost_card: boolean;
  on_leak: boolean;
  passphrase_id: string;
  live_at: Date;
}

/** Everything the plan looks at; null when the network is removed or has no passphrase in force. */
export async function planFacts(
  services: Services,
  tx: Tx,
  networkId: string,
  now: Date,
): Promise<PlanFacts | null> {
  const { db } = services;
  const row = await db.row<NetworkRow>(
    tx,
    `SELECT n.vessel_id, n.audience, n.carries_equipment, v.driver, v.epoch, p.age_limit_days, p.quiet_hours,
       p.on_party_departure, p.on_sign_off, p.on_lost_card, p.on_leak, x.id AS passphrase_id, x.live_at
     FROM networks n JOIN vessels v ON v.id = n.vessel_id JOIN policies p ON p.network_id = n.id
     JOIN passphrases x ON x.network_id = n.id AND x.live_at IS NOT NULL AND x.retired_at IS NULL
     WHERE n.id = $network AND n.removed_at IS NULL`,
    { network: networkId },
  );
  if (!row) return null;
  const bind = { vessel: row.vessel_id, since: new Date(now.getTime() - BACK_MS) };
  const zones = await db.rows<{ zone: string; fromAt: Date }>(
    tx,
    'SELECT zone, from_at AS "fromAt" FROM ship_zones WHERE vessel_id = $vessel ORDER BY from_at',
    { vessel: row.vessel_id },
  );
  const voyages = await db.rows<{ kind: string; startsAt: Date; endsAt: Date }>(
    tx,
    'SELECT kind, starts_at AS "startsAt", ends_at AS "endsAt" FROM voyages WHERE vessel_id = $vessel AND ends_at > $since ORDER BY starts_at',
    bind,
  );
  const parties = await db.rows<{ arrivesAt: Date; leavesAt: Date; ashoreAt: Date | null }>(
    tx,
    `SELECT arrives_at AS "arrivesAt", leaves_at AS "leavesAt", ashore_at AS "ashoreAt" FROM parties
     WHERE vessel_id = $vessel AND leaves_at > $since ORDER BY arrives_at`,
    bind,
  );
  const exposures = await db.rows<PlanInput['exposures'][number]>(
    tx,
    `SELECT CASE holder_kind WHEN 'guest' THEN 'departed_guest' ELSE 'sign_off' END AS kind, departed_at AS at
       FROM holders WHERE passphrase_id = $passphrase AND departed_at IS NOT NULL
     UNION ALL
     SELECT CASE kind WHEN 'lost_card' THEN 'lost_card' ELSE 'leak' END, at
       FROM leaks WHERE passphrase_id = $passphrase AND withdrawn_at IS NULL`,
    { passphrase: row.passphrase_id },
  );
  const used = await db.rows<{ occurrence: string }>(
    tx,
    `SELECT occurrence FROM rotations WHERE network_id = $network AND occurrence IS NOT NULL AND state <> 'planned'
       AND state <> 'staged' AND due_at > $since`,
    { network: networkId, since: bind.since },
  );
  const putOff = await db.row<{ due_at: Date; ended_at: Date }>(
    tx,
    `SELECT due_at, ended_at FROM rotations WHERE network_id = $network AND state = 'cancelled' AND planned_by = 'plan'
       AND created_at >= $liveAt AND due_at > $since ORDER BY ended_at DESC LIMIT 1`,
    { network: networkId, liveAt: row.live_at, since: new Date(now.getTime() - 86_400_000) },
  );
  // Something new since the cancellation counts again at once.
  const stands = putOff !== null && !exposures.some((exposure) => exposure.at > putOff.ended_at);
  return {
    vesselId: row.vessel_id,
    driver: row.driver,
    epoch: row.epoch,
    input: {
      network: { audience: row.audience, carriesEquipment: row.carries_equipment },
      policy: {
        ageLimitDays: row.age_limit_days,
        quietHours: row.quiet_hours,
        onPartyDeparture: row.on_party_departure,
        onSignOff: row.on_sign_off,
        onLostCard: row.on_lost_card,
        onLeak: row.on_leak,
      },
      liveAt: row.live_at,
      zones,
      voyages,
      parties,
      exposures,
      used: new Set(used.map(({ occurrence }) => occurrence)),
      putOffFrom: stands ? putOff.due_at : null,
      now,
    },
  };
}
