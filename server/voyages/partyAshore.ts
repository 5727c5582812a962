import type { z } from 'zod';
import type { partyAshore as contract } from '../../shared/api/arrivals.ts';
import { AppError, invalid, notFound } from '../errors.ts';
import { markDeparted } from '../handovers/holders.ts';
import { lockLog } from '../handovers/lockLog.ts';
import { type KnownCard, settleCards } from '../handovers/settleCards.ts';
import type { ResponseOf } from '../http/endpoint.ts';
import type { Verb } from '../http/verb.ts';
import { replanVessel } from '../vessels/changeVessel.ts';
import { viewParty } from './parties.ts';
import { logThat, vesselOf } from './verb.ts';

type Cards = z.output<NonNullable<typeof contract.body>>['cards'];

/**
 * The whole party leaves, in one transaction: everybody still aboard is marked ashore, returned cards are put
 * away, a lost card leaks the passphrase on it, and the plans of all networks look again.
 */
export async function partyAshore(
  context: Verb,
  partyId: string,
  cards: Cards,
): Promise<Exclude<ResponseOf<typeof contract>, { filename: string }>> {
  const { services, tx, now } = context;
  const { db } = services;
  const vesselId = vesselOf(context);
  const bind = { party: partyId, vessel: vesselId };
  await lockLog(services, tx, vesselId);
  const party = await db.row<{ ashore_at: Date | null }>(
    tx,
    'SELECT ashore_at FROM parties WHERE id = $party AND vessel_id = $vessel FOR UPDATE',
    bind,
  );
  if (!party) throw notFound();
  if (party.ashore_at) throw new AppError('conflict', 'This party was marked ashore already.');
  const known = await cardsOfParty(context, partyId, cards);
  const gone = await db.run<{ id: string }>(
    tx,
    `UPDATE guests SET ashore_at = $now, updated_at = $now
     WHERE party_id = $party AND vessel_id = $vessel AND ashore_at IS NULL RETURNING id`,
    { ...bind, now },
  );
  await db.run(
    tx,
    'UPDATE parties SET ashore_at = $now, updated_at = $now WHERE id = $party AND vessel_id = $vessel',
    {
      ...bind,
      now,
    },
  );
  const exposed = new Set(
    await markDeparted(services, tx, { vesselId, kind: 'guest', ids: gone.map(({ id }) => id) }, now),
  );
  const state = new Map(cards.map((card) => [card.cardId, card.state]));
  const settled = known.flatMap((card) => {
    const to = state.get(card.id);
    return to === 'returned' || to === 'lost' ? [{ card, to } as const] : [];
  });
  for (const networkId of await settleCards(context, settled)) exposed.add(networkId);
  const lostCards = settled.filter(({ to }) => to === 'lost').length;
  await logThat(context, {
    kind: 'party.ashore',
    body: { partyId, guests: gone.length, lostCards },
  });
  await replanVessel({ services, tx, vesselId, now });
  return {
    party: await viewParty(services, tx, vesselId, partyId),
    exposed: await nextChanges(context, [...exposed]),
    lostCards,
  };
}

/** The named cards, locked; each must have been printed for, or handed to, somebody of this party. */
async function cardsOfParty(
  { services, tx, actor }: Verb,
  partyId: string,
  cards: Cards,
): Promise<KnownCard[]> {
  if (cards.length === 0) return [];
  const known = await services.db.rows<KnownCard>(
    tx,
    `SELECT k.id, k.serial, k.state, k.network_id AS "networkId", k.passphrase_id AS "passphraseId",
       x.retired_at IS NOT NULL AS retired
     FROM cards k JOIN passphrases x ON x.id = k.passphrase_id
     WHERE k.vessel_id = $vessel AND k.id = ANY($ids::uuid[]) AND (
       EXISTS (SELECT 1 FROM guests g WHERE g.id = k.guest_id AND g.party_id = $party)
       OR EXISTS (SELECT 1 FROM handovers h JOIN guests g ON g.id = h.holder_id
         WHERE h.vessel_id = $vessel AND h.card_id = k.id AND h.undone_at IS NULL AND g.party_id = $party))
     ORDER BY k.id FOR UPDATE OF k`,
    { vessel: actor.vesselId, party: partyId, ids: cards.map((card) => card.cardId) },
  );
  const found = new Set(known.map(({ id }) => id));
  const errors: Record<string, string[]> = {};
  for (const [index, card] of cards.entries()) {
    if (!found.has(card.cardId))
      errors[`cards.${index}.cardId`] = ['This card was not for anybody of this party'];
  }
  if (Object.keys(errors).length > 0) throw invalid(errors);
  return known;
}

async function nextChanges({ services, tx, actor }: Verb, networkIds: readonly string[]) {
  const rows = await services.db.rows<{ id: string; ssid: string; due_at: Date | null }>(
    tx,
    `SELECT n.id, n.ssid, r.due_at FROM networks n
     LEFT JOIN rotations r ON r.network_id = n.id
       AND r.state IN ('planned','staged','handed_out','applying','unknown','needs_somebody','reconciling')
     WHERE n.vessel_id = $vessel AND n.removed_at IS NULL AND n.id = ANY($ids::uuid[]) ORDER BY n.ssid`,
    { vessel: actor.vesselId, ids: networkIds },
  );
  return rows.map((row) => ({
    networkId: row.id,
    ssid: row.ssid,
    changeAt: row.due_at?.toISOString() ?? null,
  }));
}
