import type { OwnPage } from '../../shared/api/crew.ts';
import { forbidden } from '../errors.ts';
import { networkFacts } from '../passphrases/codesToTry.ts';
import { type Asked, holderOf, ownCode } from '../passphrases/reveal.ts';

/** When the crew networks changed and change next, and whether this person has read the passphrase in force. */
export async function readOwnPage({
  services,
  tx,
  actor,
  vesselId,
}: Omit<Asked, 'networkId'>): Promise<OwnPage> {
  const holder = await holderOf(services, tx, vesselId, actor.personId);
  const rows = await services.db.rows<{
    id: string;
    ssid: string;
    live_at: Date | null;
    due_at: Date | null;
    read_at: Date | null;
  }>(
    tx,
    `SELECT n.id, n.ssid, x.live_at, r.due_at, h.since AS read_at
     FROM networks n
     LEFT JOIN passphrases x ON x.network_id = n.id AND x.live_at IS NOT NULL AND x.retired_at IS NULL
     LEFT JOIN rotations r ON r.network_id = n.id AND r.state IN ('planned','staged','handed_out','applying','unknown','needs_somebody')
     LEFT JOIN LATERAL (SELECT min(since) AS since FROM holders WHERE passphrase_id = x.id
       AND ((holder_kind = $kind AND holder_id = $holder) OR (holder_kind = 'person' AND holder_id = $person))) h ON true
     WHERE n.vessel_id = $vessel AND n.audience = 'crew' AND n.removed_at IS NULL ORDER BY n.ssid`,
    { vessel: vesselId, kind: holder.kind, holder: holder.id, person: actor.personId },
  );
  return {
    networks: rows.map((row) => ({
      networkId: row.id,
      ssid: row.ssid,
      since: row.live_at?.toISOString() ?? null,
      nextChangeAt: row.due_at?.toISOString() ?? null,
      readAt: row.read_at?.toISOString() ?? null,
    })),
  };
}

/** The code of one crew network; any other audience's is refused. */
export async function readOwnCode(asked: Asked) {
  const { services, tx, vesselId, networkId } = asked;
  const network = await networkFacts(services, tx, vesselId, networkId);
  if (network.audience !== 'crew') throw forbidden();
  return ownCode(asked, network);
}
