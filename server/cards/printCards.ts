import type { z } from 'zod';
import type { printBody } from '../../shared/api/cards.ts';
import type { CardFormat } from '../../shared/api/common.ts';
import type { CardLanguage } from '../../shared/messages/card.ts';
import { may, printAction } from '../../shared/rules/permissions.ts';
import { AppError, forbidden, notFound } from '../errors.ts';
import { lockLog } from '../handovers/lockLog.ts';
import type { FileReply } from '../http/reply.ts';
import type { Verb } from '../http/verb.ts';
import { type CardFacts, cardFacts } from './cardFacts.ts';
import { type Bearer, type Making, makeCards } from './makeCards.ts';
import { guestsForCards } from './previewCard.ts';

export type PrintOrder = z.output<typeof printBody>;

/**
 * Prints join cards. One transaction: serials, card rows, the log, then the passphrases opened and the file made.
 * Whatever fails leaves no card printed, none of the earlier ones void, and no serial used up.
 */
export async function printCards(context: Verb, networkId: string, order: PrintOrder): Promise<FileReply> {
  const facts = await cardFacts(context, networkId);
  await lockLog(context.services, context.tx, facts.vesselId);
  const bearers = await bearersOf(context, order);
  const language = order.language;
  return makeCards(context, facts, order.format, {
    bearers,
    language,
    which: order.which,
    voids: order.keepEarlier ? [] : await earlierCards(context, facts, bearers),
  });
}

async function bearersOf(context: Verb, order: PrintOrder): Promise<Bearer[]> {
  const { services, tx, actor, now } = context;
  if (order.blanks !== undefined) {
    const nobody = {
      guestId: null,
      crewMemberId: null,
      name: null,
      cabin: null,
      language: null,
      from: now,
      field: 'blanks',
    };
    return Array.from({ length: order.blanks }, () => nobody);
  }
  if (order.guestIds) {
    const guests = await guestsForCards(context, order.guestIds);
    return guests.map((guest, index) => ({
      guestId: guest.id,
      crewMemberId: null,
      name: guest.name,
      cabin: guest.cabin,
      language: guest.language,
      from: guest.from_at,
      field: `guestIds.${index}`,
    }));
  }
  const ids = [...new Set((order.crewMemberIds ?? []).map((id) => id.toLowerCase()))];
  const crew = await services.db.rows<{ id: string; name: string; language: string }>(
    tx,
    `SELECT id, name, language FROM crew_members WHERE vessel_id = $vessel AND id = ANY($ids::uuid[]) AND signed_off_at IS NULL
     ORDER BY array_position($ids::uuid[], id)`,
    { vessel: actor.vesselId, ids },
  );
  if (crew.length !== ids.length) throw notFound();
  return crew.map((member, index) => ({
    guestId: null,
    crewMemberId: member.id,
    name: member.name,
    cabin: null,
    language: member.language,
    from: now,
    field: `crewMemberIds.${index}`,
  }));
}

/** Cards printed for these people and still in the drawer. One already in somebody's hands stays theirs. */
async function earlierCards(
  { services, tx }: Verb,
  facts: CardFacts,
  bearers: readonly Bearer[],
): Promise<Making['voids']> {
  const people = bearers.flatMap(({ guestId, crewMemberId }) => guestId ?? crewMemberId ?? []);
  return services.db.rows(
    tx,
    `SELECT id, serial, passphrase_id FROM cards WHERE vessel_id = $vessel AND network_id = $network AND state = 'printed'
       AND (guest_id = ANY($people::uuid[]) OR crew_member_id = ANY($people::uuid[])) ORDER BY serial`,
    { vessel: facts.vesselId, network: facts.networkId, people },
  );
}

interface CardToReprint {
  readonly id: string;
  readonly serial: string;
  readonly network_id: string;
  readonly passphrase_id: string;
  readonly format: 'wallet' | 'cabin';
  readonly language: CardLanguage;
  readonly guest_id: string | null;
  readonly crew_member_id: string | null;
  readonly state: string;
}

/**
 * Prints one card again with a new serial; the earlier one is void unless told otherwise. Throws `gone` once its
 * passphrase is retired: such a card would only mislead.
 */
export async function reprintCard(
  context: Verb,
  cardId: string,
  order: { readonly format?: CardFormat | undefined; readonly keepEarlier: boolean },
): Promise<FileReply> {
  const { services, tx, actor } = context;
  const vesselId = actor.vesselId ?? '';
  await lockLog(services, tx, vesselId);
  const card = await services.db.row<CardToReprint>(
    tx,
    `SELECT id, serial, network_id, passphrase_id, format, language, guest_id, crew_member_id, state
     FROM cards WHERE id = $card AND vessel_id = $vessel FOR UPDATE`,
    { card: cardId, vessel: vesselId },
  );
  if (!card) throw notFound();
  const facts = await cardFacts(context, card.network_id);
  if (!may(actor.roles, printAction(facts.audience))) throw forbidden();
  const which = (['live', 'staged'] as const).find((one) => facts[one]?.passphraseId === card.passphrase_id);
  if (!which)
    throw new AppError(
      'gone',
      `Card ${card.serial} carries a passphrase that is no longer in force. Print a new card instead.`,
    );
  const one = { format: order.format ?? card.format, keepEarlier: true } as const;
  const bearers = await bearersOf(
    context,
    card.guest_id
      ? { ...one, guestIds: [card.guest_id] }
      : card.crew_member_id
        ? { ...one, crewMemberIds: [card.crew_member_id] }
        : { ...one, blanks: 1 },
  );
  const ended = card.state !== 'printed' && card.state !== 'handed_over';
  return makeCards(context, facts, one.format, {
    bearers,
    language: card.language,
    which,
    voids: order.keepEarlier || ended ? [] : [card],
  });
}
