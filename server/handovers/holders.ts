import type { Tx } from '../db/connection.ts';
import type { Services } from '../services.ts';
import type { Holder } from './recordHandover.ts';

/** One person who holds a network's passphrase in force. */
export interface LiveHolder extends Holder {
  readonly networkId: string;
  readonly passphraseId: string;
  /** Null when withheld or erased; then the guest's label says who it was. */
  readonly name: string | null;
  readonly label: string | null;
  readonly since: Date;
  readonly through: string;
  /** When they left the vessel; null while they are still part of it. */
  readonly departedAt: Date | null;
}

/**
 * Who holds the passphrases in force of these networks, the departed first, then by when they were given it.
 * One rule everywhere: a holder stays one until the passphrase is retired; leaving does not unlearn it.
 */
export async function holdersOf(
  services: Services,
  tx: Tx,
  networkIds: readonly string[],
): Promise<LiveHolder[]> {
  if (networkIds.length === 0) return [];
  return services.db.rows<LiveHolder>(
    tx,
    `SELECT h.network_id AS "networkId", h.passphrase_id AS "passphraseId", h.holder_kind AS kind, h.holder_id AS id,
       coalesce(g.name, c.name, p.name) AS name, g.label, h.since, h.through, h.departed_at AS "departedAt"
     FROM passphrases x JOIN holders h ON h.passphrase_id = x.id
     LEFT JOIN guests g ON h.holder_kind = 'guest' AND g.id = h.holder_id
     LEFT JOIN crew_members c ON h.holder_kind = 'crew' AND c.id = h.holder_id
     LEFT JOIN people p ON h.holder_kind = 'person' AND p.id = h.holder_id
     WHERE x.network_id = ANY($networks::uuid[]) AND x.live_at IS NOT NULL AND x.retired_at IS NULL
     ORDER BY h.network_id, h.departed_at IS NULL, h.since, h.holder_id`,
    { networks: networkIds },
  );
}

/** People of one kind on one vessel. */
export interface People {
  readonly vesselId: string;
  readonly kind: Holder['kind'];
  readonly ids: readonly string[];
}

// A crew member may have seen a passphrase as themselves and through their account.
const WHOSE = `h.vessel_id = $vessel AND ((h.holder_kind = $kind AND h.holder_id = ANY($ids::uuid[]))
  OR ($kind = 'crew' AND h.holder_kind = 'person' AND h.holder_id IN
    (SELECT c.person_id FROM crew_members c WHERE c.vessel_id = $vessel AND c.id = ANY($ids::uuid[]))))`;

/**
 * Marks people as gone from whatever they hold. Answers the networks whose passphrase in force they know:
 * those are exposed now, and the caller looks at their plans again.
 */
export async function markDeparted(services: Services, tx: Tx, who: People, at: Date): Promise<string[]> {
  return touched(services, tx, who, {
    set: `UPDATE holders h SET departed_at = $at WHERE ${WHOSE} AND h.departed_at IS NULL`,
    bind: { at },
  });
}

/** The opposite, for people who come back or were marked by mistake. */
export async function markBack(services: Services, tx: Tx, who: People): Promise<string[]> {
  return touched(services, tx, who, {
    set: `UPDATE holders h SET departed_at = NULL WHERE ${WHOSE} AND h.departed_at IS NOT NULL`,
    bind: {},
  });
}

async function touched(
  services: Services,
  tx: Tx,
  who: People,
  change: { readonly set: string; readonly bind: Record<string, unknown> },
): Promise<string[]> {
  if (who.ids.length === 0) return [];
  const networks = await services.db.rows<{ network_id: string }>(
    tx,
    `WITH changed AS (${change.set} RETURNING h.passphrase_id)
     SELECT DISTINCT x.network_id FROM passphrases x JOIN changed c ON c.passphrase_id = x.id
     WHERE x.live_at IS NOT NULL AND x.retired_at IS NULL ORDER BY 1`,
    { vessel: who.vesselId, kind: who.kind, ids: who.ids, ...change.bind },
  );
  return networks.map((row) => row.network_id);
}
