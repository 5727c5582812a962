import type { RotationState, Security } from '../../shared/api/common.ts';
import type { Audience } from '../../shared/rules/permissions.ts';
import type { Tx } from '../db/connection.ts';
import type { Services } from '../services.ts';

/** What is known of one network of a dealer's vessel: no secret, no name of a person. */
export interface NetworkFacts {
  readonly networkId: string;
  readonly ssid: string;
  readonly audience: Audience;
  readonly security: Security;
  readonly carriesEquipment: boolean;
  readonly limitDays: number;
  readonly liveAt: Date | null;
  /** Never leaves the server: presenters turn it into rough words (R16). */
  readonly bits: number | null;
  readonly holders: number;
  readonly departed: number;
  readonly leaks: number;
  readonly change: {
    readonly state: RotationState;
    readonly dueAt: Date;
    readonly reasons: unknown;
  } | null;
}

export interface VesselFacts {
  readonly vesselId: string;
  readonly name: string;
  readonly kind: string;
  readonly lengthM: number | null;
  readonly lying: string | null;
  readonly source: 'dock' | 'cellular' | 'satellite';
  readonly zone: string;
  readonly lastHeardAt: Date | null;
  readonly networks: readonly NetworkFacts[];
}

interface FactRow {
  vessel_id: string;
  name: string;
  kind: string;
  length_m: string | null;
  lying: string | null;
  source: VesselFacts['source'];
  zone: string | null;
  last_heard_at: Date | null;
  network_id: string | null;
  ssid: string;
  audience: Audience;
  security: Security;
  carries_equipment: boolean;
  age_limit_days: number | null;
  live_at: Date | null;
  bits: string | null;
  holders: number | null;
  departed: number | null;
  leaks: number | null;
  state: RotationState | null;
  due_at: Date;
  reasons: unknown;
}

/** Policy of a network that has none on record yet, in days (common practice, no source). */
const LIMIT_UNSET_DAYS = 365;
const ZONE_UNSET = 'UTC';

/** The fleet asks for the departed only, of which the partial index knows all. */
const DEPARTED_ONLY = `SELECT NULL::int AS holders, count(*)::int AS departed FROM holders
       WHERE passphrase_id = p.id AND departed_at IS NOT NULL`;
const ALL_HOLDERS = `SELECT count(*)::int AS holders, count(departed_at)::int AS departed FROM holders
       WHERE passphrase_id = p.id`;

/**
 * Every network of the dealer's vessels with its live passphrase's facts, in one statement over the partial
 * indexes of what is live, departed and open. Row-level security hides from the planner how many rows there are,
 * so each step is a lookup by index (`OFFSET 0` keeps it one); joined freely it was quadratic. `vesselId` narrows it to one vessel; somebody else's gives none.
 */
export async function fleetFacts(
  services: Services,
  tx: Tx,
  where: { readonly dealerId: string; readonly now: Date; readonly vesselId?: string },
): Promise<VesselFacts[]> {
  const rows = await services.db.rows<FactRow>(
    tx,
    `SELECT v.id AS vessel_id, v.name, v.kind, v.length_m, v.lying, v.source, v.last_heard_at,
       (SELECT z.zone FROM ship_zones z WHERE z.vessel_id = v.id AND z.from_at <= $now
        ORDER BY z.from_at DESC LIMIT 1) AS zone,
       n.id AS network_id, n.ssid, n.audience, n.security, n.carries_equipment, o.age_limit_days,
       p.live_at, p.bits, h.holders, h.departed, l.leaks, r.state, r.due_at, r.reasons
     FROM vessels v
     LEFT JOIN LATERAL (SELECT * FROM networks w WHERE w.vessel_id = v.id AND w.removed_at IS NULL OFFSET 0) n ON true
     LEFT JOIN LATERAL (SELECT w.age_limit_days FROM policies w WHERE w.network_id = n.id OFFSET 0) o ON true
     LEFT JOIN passphrases p ON p.network_id = n.id AND p.live_at IS NOT NULL AND p.retired_at IS NULL
     LEFT JOIN LATERAL (${where.vesselId === undefined ? DEPARTED_ONLY : ALL_HOLDERS}) h ON true
     LEFT JOIN LATERAL (SELECT count(*)::int AS leaks FROM leaks l
       WHERE l.passphrase_id = p.id AND l.withdrawn_at IS NULL) l ON true
     LEFT JOIN rotations r ON r.network_id = n.id
       AND r.state IN ('planned','staged','handed_out','applying','unknown','needs_somebody','reconciling')
     WHERE v.dealer_id = $dealer AND ($vessel::uuid IS NULL OR v.id = $vessel::uuid)
     ORDER BY v.name, v.id, n.audience, n.ssid`,
    {
      dealer: where.dealerId,
      vessel: where.vesselId ?? null,
      now: where.now,
    },
  );
  return gathered(rows);
}

function gathered(rows: readonly FactRow[]): VesselFacts[] {
  const vessels = new Map<string, VesselFacts & { networks: NetworkFacts[] }>();
  for (const row of rows) {
    let vessel = vessels.get(row.vessel_id);
    if (!vessel) {
      vessel = {
        vesselId: row.vessel_id,
        name: row.name,
        kind: row.kind,
        lengthM: row.length_m === null ? null : Number(row.length_m),
        lying: row.lying,
        source: row.source,
        zone: row.zone ?? ZONE_UNSET,
        lastHeardAt: row.last_heard_at,
        networks: [],
      };
      vessels.set(row.vessel_id, vessel);
    }
    if (row.network_id === null) continue;
    vessel.networks.push({
      networkId: row.network_id,
      ssid: row.ssid,
      audience: row.audience,
      security: row.security,
      carriesEquipment: row.carries_equipment,
      limitDays: row.age_limit_days ?? LIMIT_UNSET_DAYS,
      liveAt: row.live_at,
      bits: row.bits === null ? null : Number(row.bits),
      holders: row.holders ?? 0,
      departed: row.departed ?? 0,
      leaks: row.leaks ?? 0,
      change: row.state === null ? null : { state: row.state, dueAt: row.due_at, reasons: row.reasons },
    });
  }
  return [...vessels.values()];
}
