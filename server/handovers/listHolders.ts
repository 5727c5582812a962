import { type HoldersView, type HolderView, holderView } from '../../shared/api/handovers.ts';
import { type Audience, may, revealAction } from '../../shared/rules/permissions.ts';
import { zoneAt } from '../../shared/rules/shipTime.ts';
import type { Verb } from '../http/verb.ts';
import { shipZones } from '../vessels/readVessel.ts';
import { holdersOf, type LiveHolder } from './holders.ts';

interface NetworkRow {
  id: string;
  ssid: string;
  audience: Audience;
  since: Date | null;
  leaks: { kind: 'lost_card' | 'reported'; at: string }[];
}

/**
 * Who holds each network's passphrase in force, who of them has left, and what leaked. Of the owner's network
 * only those who may see its passphrase read the names.
 */
export async function listHolders({ services, tx, actor, now }: Verb): Promise<HoldersView> {
  const vesselId = actor.vesselId ?? '';
  const networks = await services.db.rows<NetworkRow>(
    tx,
    `SELECT n.id, n.ssid, n.audience, x.live_at AS since,
       (SELECT coalesce(json_agg(json_build_object('kind', l.kind, 'at', l.at) ORDER BY l.at), '[]') FROM leaks l
          WHERE l.passphrase_id = x.id AND l.withdrawn_at IS NULL) AS leaks
     FROM networks n
     LEFT JOIN passphrases x ON x.network_id = n.id AND x.live_at IS NOT NULL AND x.retired_at IS NULL
     WHERE n.vessel_id = $vessel AND n.removed_at IS NULL
     ORDER BY array_position(ARRAY['owner','guest','crew'], n.audience), n.ssid`,
    { vessel: vesselId },
  );
  const holders = await holdersOf(
    services,
    tx,
    networks.map(({ id }) => id),
  );
  const seesNames = (audience: Audience) => audience !== 'owner' || may(actor.roles, revealAction('owner'));
  return {
    zone: zoneAt(await shipZones(services, tx, vesselId), now),
    networks: networks.map((network) => {
      const mine = holders.filter((holder) => holder.networkId === network.id);
      return {
        id: network.id,
        ssid: network.ssid,
        audience: network.audience,
        since: network.since?.toISOString() ?? null,
        holders: seesNames(network.audience) ? mine.map(present) : null,
        current: mine.filter((holder) => holder.departedAt === null).length,
        departed: mine.filter((holder) => holder.departedAt !== null).length,
        leaks: network.leaks.map((leak) => ({ kind: leak.kind, at: new Date(leak.at).toISOString() })),
      };
    }),
  };
}

const present = (holder: LiveHolder): HolderView => ({
  kind: holder.kind,
  id: holder.id,
  name: holder.name,
  label: holder.label,
  since: holder.since.toISOString(),
  through: holderView.shape.through.parse(holder.through),
  departedAt: holder.departedAt?.toISOString() ?? null,
});
