import type { GuestView } from '../../shared/api/arrivals.ts';
import { language } from '../../shared/api/common.ts';
import type { Tx } from '../db/connection.ts';
import { often } from '../db/statement.ts';
import { notFound } from '../errors.ts';
import { type HandedNetwork, handedNetworks } from '../handovers/passphraseFor.ts';
import type { Services } from '../services.ts';

export interface GuestRecord {
  id: string;
  party_id: string | null;
  name: string | null;
  label: string;
  language: string;
  under_16: boolean;
  from_at: Date;
  until_at: Date;
  ashore_at: Date | null;
  erased_at: Date | null;
  cabin_id: string | null;
  cabin: string | null;
  deck: string | null;
  handover_id: string | null;
  channel: 'card' | 'screen' | null;
  handed_at: Date | null;
  handed_serial: string | null;
  card_id: string | null;
  card_serial: string | null;
}

// The passphrase each guest should have is the staged one when they come aboard from its change on.
const GUESTS = `
SELECT g.id, g.party_id, g.name, g.label, g.language, g.under_16, g.from_at, g.until_at, g.ashore_at, g.erased_at,
  c.id AS cabin_id, c.name AS cabin, c.deck,
  h.id AS handover_id, h.channel, h.at AS handed_at, h.serial AS handed_serial, k.id AS card_id, k.serial AS card_serial
FROM guests g
LEFT JOIN cabins c ON c.id = g.cabin_id
CROSS JOIN LATERAL (SELECT CASE WHEN g.from_at >= $stagedFrom::timestamptz THEN $staged::uuid ELSE $live::uuid END AS id) want
LEFT JOIN LATERAL (
  SELECT o.id, o.channel, o.at, p.serial FROM handovers o LEFT JOIN cards p ON p.id = o.card_id
  WHERE o.holder_id = g.id AND o.passphrase_id = want.id AND o.channel IN ('card','screen') AND o.undone_at IS NULL
  ORDER BY o.at DESC LIMIT 1) h ON true
LEFT JOIN LATERAL (
  SELECT p.id, p.serial FROM cards p WHERE p.guest_id = g.id AND p.passphrase_id = want.id AND p.state = 'printed'
  ORDER BY p.printed_at DESC, p.serial DESC LIMIT 1) k ON true`;

/** A party's guests by cabin, then the visitors who are not gone since `$since`. */
export const GUESTS_ABOARD = often(`${GUESTS} WHERE g.vessel_id = $vessel
  AND (g.party_id = $party::uuid OR (g.party_id IS NULL AND g.until_at > $since AND g.erased_at IS NULL))
ORDER BY g.party_id IS NULL, c.position NULLS LAST, c.name, g.position, g.from_at, g.id`);

const wants = (network: HandedNetwork | null) => ({
  live: network?.live?.passphraseId ?? null,
  staged: network?.staged?.passphraseId ?? null,
  stagedFrom: network?.staged?.from ?? null,
});

/** A party's guests by cabin, and the visitors who are not gone since `visitorsSince`, in one statement. */
export async function guestsOf(
  services: Services,
  tx: Tx,
  asked: {
    readonly vesselId: string;
    readonly partyId: string | null;
    readonly visitorsSince: Date;
    readonly network: HandedNetwork | null;
  },
): Promise<GuestRecord[]> {
  return services.db.rows<GuestRecord>(tx, GUESTS_ABOARD, {
    vessel: asked.vesselId,
    party: asked.partyId,
    since: asked.visitorsSince,
    ...wants(asked.network),
  });
}

/** One guest or visitor as the arrivals screen shows them. Throws `not_found`. */
export async function viewGuest(
  services: Services,
  tx: Tx,
  vesselId: string,
  guestId: string,
): Promise<GuestView> {
  const [network = null] = await handedNetworks(services, tx, vesselId, { audience: 'guest' });
  const row = await services.db.row<GuestRecord>(
    tx,
    `${GUESTS} WHERE g.vessel_id = $vessel AND g.id = $guest`,
    {
      vessel: vesselId,
      guest: guestId,
      ...wants(network),
    },
  );
  if (!row) throw notFound();
  return presentGuest(row);
}

export function presentGuest(row: GuestRecord): GuestView {
  const { handover_id: handoverId, handed_at: at, channel } = row;
  return {
    id: row.id,
    partyId: row.party_id,
    cabin: row.cabin_id ? { id: row.cabin_id, name: row.cabin ?? '', deck: row.deck ?? '' } : null,
    name: row.name,
    label: row.label,
    language: language.catch('en').parse(row.language),
    under16: row.under_16,
    fromAt: row.from_at.toISOString(),
    untilAt: row.until_at.toISOString(),
    ashoreAt: row.ashore_at?.toISOString() ?? null,
    erasedAt: row.erased_at?.toISOString() ?? null,
    handover:
      handoverId && at && channel
        ? { id: handoverId, channel, serial: row.handed_serial, at: at.toISOString() }
        : null,
    printedCard: row.card_id && row.card_serial ? { id: row.card_id, serial: row.card_serial } : null,
  };
}
