import type { ArrivalsView } from '../../shared/api/arrivals.ts';
import type { Source } from '../../shared/api/common.ts';
import { often } from '../db/statement.ts';
import { notFound } from '../errors.ts';
import { handedNetwork, NETWORKS, type NetworkRow } from '../handovers/passphraseFor.ts';
import type { Verb } from '../http/verb.ts';
import { guestsOf, presentGuest } from './guestRows.ts';
import { aroundNow, PARTIES_AROUND, type PartyRecord, partyOfNow, presentParty } from './parties.ts';

/** Visitors stay on the screen this long after their time is over, in milliseconds. */
const VISITORS_LINGER_MS = 12 * 3_600_000;

interface HeadRow {
  name: string;
  source: Source;
  zone: string | null;
  cabins: { id: string; name: string; deck: string }[];
  parties: Dated<PartyRecord>[];
  networks: NetworkRow[];
}
/** As JSON gives them: instants are text. */
type Dated<T> = { [K in keyof T]: Date extends T[K] ? Exclude<T[K], Date> | string : T[K] };

// Read at every arrival on every tablet: one statement for all but the guests, one for them.
export const HEAD = often(`
SELECT v.name, v.source,
  (SELECT z.zone FROM ship_zones z WHERE z.vessel_id = v.id
     ORDER BY z.from_at > $now, CASE WHEN z.from_at > $now THEN z.from_at - $now ELSE $now - z.from_at END LIMIT 1) AS zone,
  (SELECT coalesce(json_agg(json_build_object('id', c.id, 'name', c.name, 'deck', c.deck) ORDER BY c.position, c.name), '[]')
     FROM cabins c WHERE c.vessel_id = v.id) AS cabins,
  (SELECT coalesce(json_agg(to_json(around)), '[]') FROM (${PARTIES_AROUND}) around) AS parties,
  (SELECT coalesce(json_agg(to_json(handed)), '[]') FROM (${NETWORKS}) handed) AS networks
FROM vessels v WHERE v.id = $vessel`);

/** The arrivals screen: the party asked for, or the one of now, by cabin, with who was given what. */
export async function readArrivals(
  { services, tx, actor, now }: Verb,
  asked: { readonly partyId?: string; readonly networkId?: string },
): Promise<ArrivalsView> {
  const vesselId = actor.vesselId ?? '';
  const head = await services.db.row<HeadRow>(tx, HEAD, {
    vessel: vesselId,
    now,
    asked: asked.partyId ?? null,
    ...aroundNow(now),
    audience: 'guest',
    network: null,
  });
  if (!head) throw notFound();
  const parties = head.parties.map((party) => ({
    ...party,
    arrives_at: new Date(party.arrives_at),
    leaves_at: new Date(party.leaves_at),
    ashore_at: party.ashore_at === null ? null : new Date(party.ashore_at),
  }));
  const networks = head.networks.map(handedNetwork);
  const party = asked.partyId
    ? (parties.find(({ id }) => id === asked.partyId) ?? null)
    : partyOfNow(parties, now);
  if (asked.partyId && !party) throw notFound();
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
    zone: head.zone ?? 'UTC',
    vesselName: head.name,
    parties: parties.map(presentParty),
    party: party && presentParty(party),
    guests: people.filter((guest) => guest.party_id !== null).map(presentGuest),
    visitors: people.filter((guest) => guest.party_id === null).map(presentGuest),
    cabins: head.cabins,
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
    dockCaution: head.source === 'dock',
  };
}
