import type { Tx } from '../db/connection.ts';
import type { Services } from '../services.ts';

/** Serials such as M-1185, consecutive on a vessel; the caller's transaction holds the count until it ends. */
export async function takeSerials(
  services: Services,
  tx: Tx,
  vesselId: string,
  count: number,
): Promise<string[]> {
  const [row] = await services.db.run<{ serial_prefix: string; last_serial: number }>(
    tx,
    'UPDATE vessels SET last_serial = last_serial + $count WHERE id = $vessel RETURNING serial_prefix, last_serial',
    { count, vessel: vesselId },
  );
  if (!row) throw new Error('The vessel of a card is not there');
  const first = row.last_serial - count + 1;
  return Array.from({ length: count }, (_one, index) => `${row.serial_prefix}-${first + index}`);
}

/** A card that could be handed over now. */
export interface ReadyCard {
  /** Null when nothing is printed: the next serial would be given. */
  readonly id: string | null;
  readonly serial: string;
}

/**
 * The card a person would be handed with this passphrase: the one printed for them, else the first printed blank,
 * else the next serial.
 */
export async function readyCard(
  services: Services,
  tx: Tx,
  given: {
    readonly vesselId: string;
    readonly passphraseId: string;
    readonly guestId?: string | undefined;
    readonly crewMemberId?: string | undefined;
  },
): Promise<ReadyCard> {
  const row = await services.db.row<ReadyCard>(
    tx,
    `SELECT id, serial FROM (
     (SELECT id, serial FROM cards WHERE vessel_id = $vessel AND passphrase_id = $passphrase AND state = 'printed'
        AND ((guest_id IS NULL AND crew_member_id IS NULL) OR guest_id = $guest::uuid OR crew_member_id = $crew::uuid)
      ORDER BY guest_id IS NULL AND crew_member_id IS NULL, length(serial), serial LIMIT 1)
     UNION ALL
     SELECT NULL, serial_prefix || '-' || last_serial + 1 FROM vessels WHERE id = $vessel) ready
     ORDER BY id IS NULL LIMIT 1`,
    {
      vessel: given.vesselId,
      passphrase: given.passphraseId,
      guest: given.guestId ?? null,
      crew: given.crewMemberId ?? null,
    },
  );
  if (!row) throw new Error('The vessel of a card is not there');
  return row;
}
