import type { ArrivalsView } from '../../shared/api/arrivals.ts';
import type { Source } from '../../shared/api/common.ts';
import { notFound } from '../errors.ts';
import { handedNetworks } from '../handovers/passphraseFor.ts';
import type { Verb } from '../http/verb.ts';
import { guestsOf, presentGuest } from './guestRows.ts';
import { partiesAround, partyOfNow, presentParty } from './parties.ts';

/** Visitors stay on the screen this long after their time is over, in milliseconds. */
const VISITORS_LINGER_MS = 12 * 3_600_000;

interface VesselRow {
  name: string;
  source: Source;
  zone: string | null;
  cabins: { id: string; name: string; deck: string }[];
}

/** The arrivals screen: the party asked for, or the one of now, by cabin, with who was given what. */
export async function readArrivals(
  { services, tx, actor, now }: Verb,
  asked: { readonly partyId?: string; readonly networkId?: string },
): Promise<ArrivalsView> {
  const vesselId = actor.vesselId ?? '';
  const vessel = await services.db.row<VesselRow>(
    tx,
    `SELECT v.name, v.source,
       (SELECT z.zone FROM ship_zones z WHERE z.vessel_id = v.id ORDER BY z.from_at > $now, CASE WHEN z.from_at > $now
          THEN z.from_at - $now ELSE $now - z.from_at END LIMIT 1) AS zone,
       (SELECT coalesce(json_agg(json_build_object('id', c.id, 'name', c.name, 'deck', c.deck) ORDER BY c.position, c.name), '[]')
          FROM cabins c WHERE c.vessel_id = v.id) AS cabins
     FROM vessels v WHERE v.id = $vessel`,
    { vessel: vesselId, now },
  );
  if (!vessel) throw notFound();
  const parties = await partiesAround(services, tx, vesselId, now, asked.partyId ?? null);
  const party = asked.partyId
    ? (parties.find(({ id }) => id === asked.partyId) ?? null)
    : partyOfNow(parties, now);
  if (asked.partyId && !party) throw notFound();
  const networks = await handedNetworks(services, tx, vesselId, { audience: 'guest' });
  const network = asked.networkId ? networks.find(({ id }) => id === asked.networkId) : (networks[0] ?? null);
  if (network === undefined) throw notFound();
  const people = await guestsOf(services, tx, {
    vesselId,
    partyId: party?.id ?? null,
    visitorsSince: new Date(now.getTime() - VISITORS_LINGER_MS),
    network,
  });
  return {
    at: now.toISOString(),
    zone: vessel.zone ?? 'UTC',
    vesselName: vessel.name,
    parties: parties.map(presentParty),
    party: party && presentParty(party),
    guests: people.filter((guest) => guest.party_id !== null).map(presentGuest),
    visitors: people.filter((guest) => guest.party_id === null).map(presentGuest),
    cabins: vessel.cabins,
    networks: networks.map(({ id, ssid }) => ({ id, ssid })),
    network: network && {
      id: network.id,
      ssid: network.ssid,
      live: network.live && {
        passphraseId: network.live.passphraseId,
        since: network.live.since.toISOString(),
      },
      staged: network.staged && {
        passphraseId: network.staged.passphraseId,
        from: network.staged.from.toISOString(),
      },
    },
    dockCaution: vessel.source === 'dock',
  };
}
