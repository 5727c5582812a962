import type { CardState } from '../../shared/api/cards.ts';
import { type Audience, handOverAction, may, printAction } from '../../shared/rules/permissions.ts';
import { AppError, forbidden, notFound } from '../errors.ts';
import { appendLog } from '../handovers/appendLog.ts';
import { lockLog } from '../handovers/lockLog.ts';
import { settleCards } from '../handovers/settleCards.ts';
import type { Verb } from '../http/verb.ts';
import { byActor } from '../rotations/by.ts';
import { replanNetwork } from '../rotations/replan.ts';

export interface StoredCard {
  readonly id: string;
  readonly serial: string;
  readonly state: CardState;
  readonly network_id: string;
  readonly passphrase_id: string;
  readonly audience: Audience;
  readonly retired: boolean;
}

/** The card's row, locked after the vessel's log. Throws `not_found`. */
export async function lockCard(context: Verb, cardId: string): Promise<StoredCard> {
  const { services, tx, actor } = context;
  const vesselId = actor.vesselId ?? '';
  await lockLog(services, tx, vesselId);
  const card = await services.db.row<StoredCard>(
    tx,
    `SELECT c.id, c.serial, c.state, c.network_id, c.passphrase_id, n.audience, x.retired_at IS NOT NULL AS retired
     FROM cards c JOIN networks n ON n.id = c.network_id JOIN passphrases x ON x.id = c.passphrase_id
     WHERE c.id = $card AND c.vessel_id = $vessel FOR UPDATE OF c`,
    { card: cardId, vessel: vesselId },
  );
  if (!card) throw notFound();
  return card;
}

/** Makes a card void that was spoilt or torn up. */
export async function voidCard(context: Verb, cardId: string): Promise<void> {
  const card = await lockCard(context, cardId);
  if (!may(context.actor.roles, printAction(card.audience))) throw forbidden();
  await end(context, card, 'void', ['printed', 'handed_over', 'returned']);
}

/** A card came back, also one that was taken for lost; its leak stays until somebody withdraws it. */
export async function returnCard(context: Verb, cardId: string): Promise<void> {
  const card = await lockCard(context, cardId);
  if (!may(context.actor.roles, handOverAction(card.audience))) throw forbidden();
  await end(context, card, 'returned', ['handed_over', 'lost']);
}

/**
 * A card is lost: a leak of the passphrase it carries, while that one counts. Answers the change that now comes,
 * or null when the passphrase is retired or nothing can be planned.
 */
export async function loseCard(context: Verb, cardId: string): Promise<Date | null> {
  const { services, tx, actor, now } = context;
  const card = await lockCard(context, cardId);
  if (!may(actor.roles, handOverAction(card.audience))) throw forbidden();
  requireState(card, ['printed', 'handed_over']);
  const { id, serial, state, network_id: networkId, passphrase_id: passphraseId, retired } = card;
  const known = { id, serial, state, networkId, passphraseId, retired };
  const [exposed] = await settleCards(context, [{ card: known, to: 'lost' }]);
  return exposed ? ((await replanNetwork(services, tx, exposed, now))?.dueAt ?? null) : null;
}

const WORDS: Record<CardState, string> = {
  printed: 'printed and not handed over',
  handed_over: 'in use',
  returned: 'returned already',
  lost: 'marked lost already',
  void: 'void already',
};

function requireState(card: StoredCard, allowed: readonly CardState[]): void {
  if (!allowed.includes(card.state))
    throw new AppError('conflict', `Card ${card.serial} is ${WORDS[card.state]}. Look at the list again.`);
}

async function end(
  context: Verb,
  card: StoredCard,
  state: 'void' | 'returned',
  from: readonly CardState[],
): Promise<void> {
  const { services, tx, actor, now } = context;
  requireState(card, from);
  await services.db.run(
    tx,
    'UPDATE cards SET state = $state, ended_at = $now WHERE id = $card AND vessel_id = $vessel',
    { state, now, card: card.id, vessel: actor.vesselId },
  );
  await appendLog(services, tx, [
    {
      vesselId: actor.vesselId ?? '',
      kind: `card.${state}`,
      at: now,
      networkId: card.network_id,
      passphraseId: card.passphrase_id,
      subject: { kind: 'card', id: card.id },
      actor: byActor(context).actor,
      body: { serial: card.serial },
    },
  ]);
}
