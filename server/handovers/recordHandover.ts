import { randomUUID } from 'node:crypto';
import type { Tx } from '../db/connection.ts';
import type { Services } from '../services.ts';

/** How somebody came to know a passphrase. */
export type HandoverChannel = 'card' | 'screen' | 'own_page' | 'reveal' | 'entry_sheet' | 'typed';

/** A person who knows a passphrase: a guest, a crew member, or somebody with an account and no crew entry. */
export interface Holder {
  readonly kind: 'guest' | 'crew' | 'person';
  readonly id: string;
}

export interface Given {
  readonly vesselId: string;
  readonly networkId: string;
  readonly passphraseId: string;
  readonly holder: Holder;
  readonly channel: HandoverChannel;
  readonly cardId?: string | null;
  readonly byPerson: string | null;
  readonly at: Date;
}

/**
 * Writes down that somebody was given a passphrase, and that they hold it from now on, in the caller's
 * transaction. The same person, passphrase, channel and card count once: a repeat answers the first handover's id.
 */
export async function recordHandover(services: Services, tx: Tx, given: Given): Promise<string> {
  return (await recordHandoverOnce(services, tx, given)).id;
}

/** As {@link recordHandover}, and says whether it was written down before. */
export async function recordHandoverOnce(
  services: Services,
  tx: Tx,
  given: Given,
): Promise<{ readonly id: string; readonly at: Date; readonly already: boolean }> {
  const { db } = services;
  const id = randomUUID();
  const bind = {
    vessel: given.vesselId,
    network: given.networkId,
    passphrase: given.passphraseId,
    kind: given.holder.kind,
    holder: given.holder.id,
    channel: given.channel,
    at: given.at,
  };
  const card = given.cardId ?? null;
  const written = await db.run(
    tx,
    `INSERT INTO handovers(id, vessel_id, network_id, passphrase_id, holder_kind, holder_id, channel, card_id, by_person, at)
     VALUES ($id, $vessel, $network, $passphrase, $kind, $holder, $channel, $card, $by, $at)
     ON CONFLICT (holder_id, passphrase_id, channel, card_id) WHERE undone_at IS NULL DO NOTHING RETURNING id`,
    { ...bind, id, card, by: given.byPerson },
  );
  if (written.length === 0) {
    const first = await db.row<{ id: string; at: Date }>(
      tx,
      `SELECT id, at FROM handovers WHERE vessel_id = $vessel AND holder_id = $holder AND passphrase_id = $passphrase
         AND channel = $channel AND card_id IS NOT DISTINCT FROM $card::uuid AND undone_at IS NULL`,
      {
        vessel: bind.vessel,
        holder: bind.holder,
        passphrase: bind.passphrase,
        channel: bind.channel,
        card,
      },
    );
    if (!first) throw new Error('A handover met another one that is not there');
    return { ...first, already: true };
  }
  await db.run(
    tx,
    `INSERT INTO holders(passphrase_id, holder_kind, holder_id, vessel_id, network_id, since, through)
     VALUES ($passphrase, $kind, $holder, $vessel, $network, $at, $channel) ON CONFLICT DO NOTHING`,
    bind,
  );
  return { id, at: given.at, already: false };
}
