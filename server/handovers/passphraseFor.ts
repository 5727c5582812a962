import type { Audience } from '../../shared/rules/permissions.ts';
import type { Tx } from '../db/connection.ts';
import type { Services } from '../services.ts';

/** A network as far as handing out goes. */
export interface HandedNetwork {
  readonly id: string;
  readonly ssid: string;
  readonly audience: Audience;
  readonly live: { readonly passphraseId: string; readonly since: Date } | null;
  /** A change whose passphrase is made already, and when it is meant to come into force. */
  readonly staged: { readonly passphraseId: string; readonly from: Date } | null;
}

/** A network as {@link NETWORKS} answers it. */
export interface NetworkRow {
  id: string;
  ssid: string;
  audience: Audience;
  live_id: string | null;
  live_at: Date | string | null;
  staged_id: string | null;
  due_at: Date | string | null;
}

/** A vessel's networks with what can be handed out of each, those with a passphrase first. */
export const NETWORKS = `
SELECT n.id, n.ssid, n.audience, x.id AS live_id, x.live_at, r.to_passphrase_id AS staged_id, r.due_at
FROM networks n
LEFT JOIN passphrases x ON x.network_id = n.id AND x.live_at IS NOT NULL AND x.retired_at IS NULL
LEFT JOIN rotations r ON r.network_id = n.id AND r.to_passphrase_id IS NOT NULL
  AND r.state IN ('planned','staged','handed_out','applying','unknown','needs_somebody','reconciling')
WHERE n.vessel_id = $vessel AND n.removed_at IS NULL
  AND ($audience::text IS NULL OR n.audience = $audience) AND ($network::uuid IS NULL OR n.id = $network)
ORDER BY x.id IS NULL, n.ssid, n.id`;

/** The vessel's networks of one audience, or the one named, if it is the vessel's. */
export async function handedNetworks(
  services: Services,
  tx: Tx,
  vesselId: string,
  which: { readonly audience?: Audience; readonly networkId?: string },
): Promise<HandedNetwork[]> {
  const rows = await services.db.rows<NetworkRow>(tx, NETWORKS, {
    vessel: vesselId,
    audience: which.audience ?? null,
    network: which.networkId ?? null,
  });
  return rows.map(handedNetwork);
}

export const handedNetwork = (row: NetworkRow): HandedNetwork => ({
  id: row.id,
  ssid: row.ssid,
  audience: row.audience,
  live: row.live_id && row.live_at ? { passphraseId: row.live_id, since: new Date(row.live_at) } : null,
  staged: row.staged_id && row.due_at ? { passphraseId: row.staged_id, from: new Date(row.due_at) } : null,
});

/** The passphrase somebody should be given who is aboard from `from` on: the staged one from its change on. */
export function passphraseFor(
  network: HandedNetwork,
  from: Date,
): { readonly passphraseId: string; readonly which: 'live' | 'staged' } | null {
  const { live, staged } = network;
  if (staged && from.getTime() >= staged.from.getTime())
    return { passphraseId: staged.passphraseId, which: 'staged' };
  return live && { passphraseId: live.passphraseId, which: 'live' };
}
