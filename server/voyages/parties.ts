import type { PartyView } from '../../shared/api/arrivals.ts';
import type { Tx } from '../db/connection.ts';
import { notFound } from '../errors.ts';
import type { Services } from '../services.ts';

export interface PartyRecord {
  id: string;
  name: string;
  arrives_at: Date;
  leaves_at: Date;
  ashore_at: Date | null;
  count: number;
}

const PARTIES = `SELECT p.id, p.name, p.arrives_at, p.leaves_at, p.ashore_at,
  (SELECT count(*)::int FROM guests g WHERE g.party_id = p.id) AS count FROM parties p`;

/** Parties shown on the arrivals screen reach this far back and ahead, in milliseconds. */
const BACK_MS = 14 * 86_400_000;
const AHEAD_MS = 60 * 86_400_000;

/** Parties around now and the one asked for, earliest arrival first; binds of {@link aroundNow}. */
export const PARTIES_AROUND = `${PARTIES} WHERE p.vessel_id = $vessel
  AND (p.id = $asked::uuid OR (p.leaves_at > $since AND p.arrives_at < $until))
ORDER BY p.arrives_at, p.id LIMIT 60`;

export const aroundNow = (now: Date) => ({
  since: new Date(now.getTime() - BACK_MS),
  until: new Date(now.getTime() + AHEAD_MS),
});

/** The party aboard; between two, the next; when none is to come, the last. */
export function partyOfNow(parties: readonly PartyRecord[], now: Date): PartyRecord | null {
  const aboard = parties.findLast(
    (party) => party.ashore_at === null && party.arrives_at <= now && party.leaves_at > now,
  );
  const next = parties.find((party) => party.ashore_at === null && party.arrives_at > now);
  return aboard ?? next ?? parties.at(-1) ?? null;
}

/** One party, as the screen shows it. Throws `not_found`. */
export async function viewParty(
  services: Services,
  tx: Tx,
  vesselId: string,
  partyId: string,
): Promise<PartyView> {
  const row = await services.db.row<PartyRecord>(
    tx,
    `${PARTIES} WHERE p.vessel_id = $vessel AND p.id = $party`,
    {
      vessel: vesselId,
      party: partyId,
    },
  );
  if (!row) throw notFound();
  return presentParty(row);
}

export const presentParty = (row: PartyRecord): PartyView => ({
  id: row.id,
  name: row.name,
  arrivesAt: row.arrives_at.toISOString(),
  leavesAt: row.leaves_at.toISOString(),
  ashoreAt: row.ashore_at?.toISOString() ?? null,
  count: row.count,
});
