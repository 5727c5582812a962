import type { RotationState } from '../../shared/api/common.ts';
import type { FleetChange, FleetVesselView } from '../../shared/api/fleet.ts';
import type { Audience } from '../../shared/rules/permissions.ts';
import type { Tx } from '../db/connection.ts';
import { notFound } from '../errors.ts';
import type { Services } from '../services.ts';
import { fleetFacts, type NetworkFacts } from './fleetFacts.ts';
import { ageDays, guessWords, isSilent, nextChangeOf, standingOf } from './judge.ts';
import { presentNextChange, rounded, vesselStanding } from './presentFleet.ts';

/** One vessel of the dealer's own fleet. Somebody else's, or none, is not found. */
export async function readFleetVessel(
  services: Services,
  tx: Tx,
  given: { readonly dealerId: string | null; readonly vesselId: string; readonly now: Date },
): Promise<FleetVesselView> {
  const { dealerId, vesselId, now } = given;
  if (dealerId === null) throw notFound();
  const [vessel] = await fleetFacts(services, tx, { dealerId, vesselId, now });
  if (!vessel) throw notFound();
  return {
    vesselId,
    name: vessel.name,
    kind: vessel.kind,
    lengthM: vessel.lengthM,
    lying: vessel.lying,
    source: vessel.source,
    zone: vessel.zone,
    standing: vesselStanding(vessel, now),
    lastHeardAt: vessel.lastHeardAt?.toISOString() ?? null,
    silent: isSilent(vessel.lastHeardAt, now),
    networks: vessel.networks.map((network) => presentNetwork(network, now)),
    history: await history(services, tx, { dealerId, vesselId, now }),
  };
}

function presentNetwork(network: NetworkFacts, now: Date): FleetVesselView['networks'][number] {
  const age = ageDays(network, now);
  return {
    networkId: network.networkId,
    ssid: network.ssid,
    audience: network.audience,
    security: network.security,
    carriesEquipment: network.carriesEquipment,
    standing: standingOf(network, now),
    ageDays: age === null ? null : rounded(age, 100),
    limitDays: network.limitDays,
    ratio: age === null ? null : rounded(age / network.limitDays, 10_000),
    liveAt: network.liveAt?.toISOString() ?? null,
    guess: guessWords(network),
    holders: network.holders,
    departedHolders: network.departed,
    openLeaks: network.leaks,
    nextChange: presentNextChange(nextChangeOf(network)),
  };
}

interface ChangeRow {
  id: string;
  network_id: string;
  audience: Audience;
  state: RotationState;
  planned_by: 'plan' | 'person';
  mode: 'graceful' | 'urgent';
  due_at: Date;
  deadline_at: Date | null;
  live_at: Date | null;
  reasons: unknown;
}

const HISTORY_MAX = 100;

async function history(
  services: Services,
  tx: Tx,
  where: { readonly dealerId: string; readonly vesselId: string; readonly now: Date },
): Promise<FleetChange[]> {
  const rows = await services.db.rows<ChangeRow>(
    tx,
    `SELECT r.id, r.network_id, n.audience, r.state, r.planned_by, r.mode, r.due_at, r.deadline_at, r.live_at, r.reasons
     FROM rotations r JOIN networks n ON n.id = r.network_id JOIN vessels v ON v.id = r.vessel_id
     WHERE r.vessel_id = $vessel AND v.dealer_id = $dealer
     ORDER BY coalesce(r.live_at, r.due_at) DESC, r.id LIMIT ${HISTORY_MAX}`,
    { vessel: where.vesselId, dealer: where.dealerId },
  );
  return rows.map((row) => ({
    id: row.id,
    networkId: row.network_id,
    audience: row.audience,
    state: row.state,
    timing: timing(row, where.now),
    plannedBy: row.planned_by,
    urgent: row.mode === 'urgent',
    dueAt: row.due_at.toISOString(),
    deadlineAt: row.deadline_at?.toISOString() ?? null,
    liveAt: row.live_at?.toISOString() ?? null,
    words: STATE_WORDS[row.state],
  }));
}

const STATE_WORDS: Record<RotationState, string> = {
  planned: 'planned',
  staged: 'ready for the boat',
  handed_out: 'sent to the boat',
  applying: 'under way',
  unknown: 'no report from the boat',
  needs_somebody: 'needs somebody aboard',
  reconciling: 'being checked after a restore',
  live: 'in force',
  drifted: 'an access point runs something else',
  retired: 'replaced since',
  cancelled: 'cancelled',
  superseded: 'given up for a new one',
};

/** In force by its deadline or not; an open one is late once the deadline is over, one given up is neither. */
function timing(row: ChangeRow, now: Date): 'on_time' | 'late' | null {
  if (row.deadline_at === null || row.state === 'cancelled' || row.state === 'superseded') return null;
  if (row.live_at !== null) return row.live_at <= row.deadline_at ? 'on_time' : 'late';
  return now > row.deadline_at ? 'late' : null;
}
