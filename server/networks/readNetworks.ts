import type { z } from 'zod';
import type { Security } from '../../shared/api/common.ts';
import type { NetworkDetail, NetworkView, Policy, quietHours } from '../../shared/api/networks.ts';
import { ssidCautions } from '../../shared/rules/passphrase.ts';
import {
  type Audience,
  may,
  planAction,
  revealAction,
  type VesselRole,
} from '../../shared/rules/permissions.ts';
import { OPEN_STATES } from '../../shared/rules/rotation.ts';
import { ageInDays, standingOf } from '../../shared/rules/standing.ts';
import { verdict } from '../../shared/rules/strength.ts';
import type { Tx } from '../db/connection.ts';
import { notFound } from '../errors.ts';
import { holdersOf } from '../handovers/holders.ts';
import { presentSummary, SUMMARY, type SummaryRow } from '../rotations/present.ts';
import type { Services } from '../services.ts';

interface NetworkRow {
  id: string;
  ssid: string;
  audience: Audience;
  security: Security;
  hidden: boolean;
  carries_equipment: boolean;
  note: string | null;
  age_limit_days: number;
  least_bits: number;
  words: number;
  quiet_hours: z.infer<typeof quietHours>[];
  on_party_departure: boolean;
  on_sign_off: boolean;
  on_lost_card: boolean;
  on_leak: boolean;
  passphrase_id: string | null;
  generation: number;
  origin: 'generated' | 'typed';
  bits: string;
  live_at: Date;
  current: number;
  departed: number;
}

interface LeakRow {
  id: string;
  network_id: string;
  kind: 'lost_card' | 'reported';
  at: Date;
  note: string | null;
  by_person: string | null;
  serial: string | null;
}

export interface Asking {
  readonly vesselId: string;
  readonly personId: string;
  readonly roles: readonly VesselRole[];
  readonly now: Date;
}

/** How hard a stored passphrase is: a drawn one by its bits, a typed one by the guesses it was scored at. */
export const hardnessOf = (row: { origin: 'generated' | 'typed'; bits: string }) =>
  row.origin === 'generated' ? { bits: Number(row.bits) } : { guesses: 2 ** Number(row.bits) };

/** The vessel's networks, owner first, or the one asked for. Four statements, whatever their number. */
export async function readNetworks(
  services: Services,
  tx: Tx,
  asking: Asking,
  networkId: string | null = null,
): Promise<NetworkView[]> {
  const { db } = services;
  const bind = { vessel: asking.vesselId, network: networkId };
  const rows = await db.rows<NetworkRow>(
    tx,
    `SELECT n.id, n.ssid, n.audience, n.security, n.hidden, n.carries_equipment, n.note, p.age_limit_days, p.least_bits, p.words,
       p.quiet_hours, p.on_party_departure, p.on_sign_off, p.on_lost_card, p.on_leak,
       x.id AS passphrase_id, x.generation, x.origin, x.bits, x.live_at, coalesce(h.current, 0) AS current, coalesce(h.departed, 0) AS departed
     FROM networks n JOIN policies p ON p.network_id = n.id
     LEFT JOIN passphrases x ON x.network_id = n.id AND x.live_at IS NOT NULL AND x.retired_at IS NULL
     LEFT JOIN LATERAL (SELECT count(*) FILTER (WHERE departed_at IS NULL)::int AS current, count(*) FILTER (WHERE departed_at IS NOT NULL)::int AS departed
       FROM holders WHERE passphrase_id = x.id) h ON true
     WHERE n.vessel_id = $vessel AND n.removed_at IS NULL AND ($network::uuid IS NULL OR n.id = $network::uuid)
     ORDER BY array_position(ARRAY['owner','guest','crew'], n.audience), n.ssid`,
    bind,
  );
  const leaks = await db.rows<LeakRow>(
    tx,
    `SELECT l.id, l.network_id, l.kind, l.at, l.note, l.by_person, c.serial FROM leaks l
     JOIN passphrases x ON x.id = l.passphrase_id AND x.live_at IS NOT NULL AND x.retired_at IS NULL
     LEFT JOIN cards c ON c.id = l.card_id
     WHERE l.vessel_id = $vessel AND ($network::uuid IS NULL OR l.network_id = $network::uuid) AND l.withdrawn_at IS NULL ORDER BY l.at DESC`,
    bind,
  );
  const changes = await db.rows<SummaryRow>(
    tx,
    `${SUMMARY} WHERE r.vessel_id = $vessel AND ($network::uuid IS NULL OR r.network_id = $network::uuid) AND r.state = ANY($shown::text[])`,
    { ...bind, shown: [...OPEN_STATES, 'drifted'] },
  );
  return rows.map((row) =>
    present(row, asking, {
      leaks: leaks.filter((leak) => leak.network_id === row.id),
      change: changes.find((one) => one.network_id === row.id && one.state !== 'drifted') ?? null,
      drift: changes.find((one) => one.network_id === row.id && one.state === 'drifted') ?? null,
    }),
  );
}

function policyOf(row: NetworkRow): Policy {
  return {
    ageLimitDays: row.age_limit_days,
    leastBits: row.least_bits,
    words: row.words,
    quietHours: row.quiet_hours,
    onPartyDeparture: row.on_party_departure,
    onSignOff: row.on_sign_off,
    onLostCard: row.on_lost_card,
    onLeak: row.on_leak,
  };
}

function liveOf(row: NetworkRow, now: Date): NetworkView['live'] {
  if (row.passphrase_id === null) return null;
  const judged = verdict({ security: row.security, ageLimitDays: row.age_limit_days, ...hardnessOf(row) });
  return {
    passphraseId: row.passphrase_id,
    generation: row.generation,
    origin: row.origin,
    liveAt: row.live_at.toISOString(),
    ageDays: ageInDays(row.live_at, now),
    grade: judged.grade,
    strength: judged.words,
  };
}

function present(
  row: NetworkRow,
  { roles, personId, now }: Asking,
  parts: { leaks: readonly LeakRow[]; change: SummaryRow | null; drift: SummaryRow | null },
): NetworkView {
  const live = liveOf(row, now);
  return {
    id: row.id,
    ssid: row.ssid,
    audience: row.audience,
    security: row.security,
    hidden: row.hidden,
    carriesEquipment: row.carries_equipment,
    note: row.note,
    cautions: ssidCautions(row.ssid),
    policy: policyOf(row),
    live,
    standing: standingOf({
      ratio: live ? live.ageDays / row.age_limit_days : null,
      departed: row.departed,
      leaks: parts.leaks.length,
    }),
    holders: { current: row.current, departed: row.departed },
    leaks: parts.leaks.map(({ id, kind, at, note, by_person, serial }) => ({
      id,
      kind,
      at: at.toISOString(),
      // A note may name a guest, so it is for those who may see guests and whoever wrote it.
      note: may(roles, 'arrivals.view') || by_person === personId ? note : null,
      serial,
    })),
    change: parts.change ? presentSummary(parts.change) : null,
    drift: parts.drift ? presentSummary(parts.drift) : null,
    may: {
      plan: may(roles, planAction(row.audience)),
      reveal: may(roles, revealAction(row.audience)),
      edit: may(roles, 'networks.edit'),
      policy: may(roles, 'policy.edit'),
      typeIn: may(roles, 'passphrase.type'),
    },
  };
}

/** One network as {@link readNetworks} presents it. Throws `not_found` for another vessel's or a removed one. */
export async function readNetwork(
  services: Services,
  tx: Tx,
  asking: Asking,
  networkId: string,
): Promise<NetworkView> {
  const [network] = await readNetworks(services, tx, asking, networkId);
  if (!network) throw notFound();
  return network;
}

/** One network with its holders, named only for those who may know them, and its past passphrases. */
export async function readNetworkDetail(
  services: Services,
  tx: Tx,
  asking: Asking,
  networkId: string,
): Promise<NetworkDetail> {
  const network = await readNetwork(services, tx, asking, networkId);
  const holders = await holdersOf(services, tx, [networkId]);
  const named = {
    guest: may(asking.roles, 'arrivals.view'),
    crew: may(asking.roles, 'crew.view'),
    person: may(asking.roles, 'crew.view'),
  };
  const history = await services.db.rows<{
    generation: number;
    origin: 'generated' | 'typed';
    bits: string;
    live_at: Date | null;
    retired_at: Date | null;
    state: NetworkDetail['history'][number]['state'];
  }>(
    tx,
    `SELECT x.generation, x.origin, x.bits, x.live_at, x.retired_at, r.state FROM passphrases x
     LEFT JOIN LATERAL (SELECT state FROM rotations WHERE to_passphrase_id = x.id ORDER BY created_at DESC LIMIT 1) r ON true
     WHERE x.network_id = $network AND x.vessel_id = $vessel ORDER BY x.generation DESC LIMIT 100`,
    { network: networkId, vessel: asking.vesselId },
  );
  return {
    ...network,
    holderList: holders.map((holder) => ({
      kind: holder.kind,
      name: named[holder.kind] ? (holder.name ?? holder.label) : null,
      since: holder.since.toISOString(),
      through: holder.through,
      departedAt: holder.departedAt?.toISOString() ?? null,
    })),
    history: history.map((row) => ({
      generation: row.generation,
      origin: row.origin,
      grade: verdict({
        security: network.security,
        ageLimitDays: network.policy.ageLimitDays,
        ...hardnessOf(row),
      }).grade,
      liveAt: row.live_at?.toISOString() ?? null,
      retiredAt: row.retired_at?.toISOString() ?? null,
      state: row.state,
    })),
  };
}
