import type { HandoverAnswer } from '../../shared/api/handovers.ts';
import { UNDO_SECONDS } from '../../shared/rules/limits.ts';
import { handOverAction, may } from '../../shared/rules/permissions.ts';
import { AppError, forbidden, invalid, notFound } from '../errors.ts';
import type { Verb } from '../http/verb.ts';
import { appendLog } from './appendLog.ts';
import { lockLog } from './lockLog.ts';
import { type HandedNetwork, handedNetworks, passphraseFor } from './passphraseFor.ts';
import { type Holder, recordHandoverOnce } from './recordHandover.ts';

export interface Wanted {
  readonly guestId?: string;
  readonly crewMemberId?: string;
  readonly networkId: string;
  readonly channel: 'card' | 'screen';
  readonly cardId: string | null;
}

interface Receiver extends Holder {
  readonly name: string | null;
  /** From when they are aboard: decides between the passphrase in force and a staged one. */
  readonly from: Date;
}

/**
 * Somebody is given a network's passphrase: the card's state, the receipt, who holds it and the log's line, in
 * one transaction under the vessel's log head, so that two people doing it at once leave one handover.
 */
export async function handOver(context: Verb, wanted: Wanted): Promise<HandoverAnswer> {
  const { services, tx, actor, now } = context;
  const vesselId = actor.vesselId ?? '';
  await lockLog(services, tx, vesselId);
  const [network] = await handedNetworks(services, tx, vesselId, { networkId: wanted.networkId });
  if (!network) throw notFound();
  if (!may(actor.roles, handOverAction(network.audience))) throw forbidden();
  const receiver = await lockReceiver(context, wanted, network);
  const right = passphraseFor(network, receiver.from);
  if (!right) {
    throw new AppError(
      'not_now',
      'No passphrase in force is recorded for this network. Ask the ETO or the captain to type it in first.',
    );
  }
  const card =
    wanted.channel === 'card' ? await takeCard(context, wanted, receiver, right.passphraseId) : null;
  const done = await recordHandoverOnce(services, tx, {
    vesselId,
    networkId: network.id,
    passphraseId: right.passphraseId,
    holder: receiver,
    channel: wanted.channel,
    cardId: card?.id ?? null,
    byPerson: actor.personId,
    at: now,
  });
  if (!done.already) {
    await appendLog(services, tx, [
      {
        vesselId,
        kind: wanted.channel === 'card' ? 'handover.card' : 'handover.screen',
        at: now,
        networkId: network.id,
        passphraseId: right.passphraseId,
        subject: { kind: receiver.kind, id: receiver.id, name: receiver.name },
        actor: { id: actor.personId, name: actor.name },
        body: { audience: network.audience, which: right.which, ...(card ? { serial: card.serial } : {}) },
      },
    ]);
  }
  return {
    handoverId: done.id,
    passphraseId: right.passphraseId,
    which: right.which,
    at: done.at.toISOString(),
    undoUntil: new Date(done.at.getTime() + UNDO_SECONDS * 1000).toISOString(),
    already: done.already,
    sentence: done.already
      ? 'This was handed over already; it is in the log once.'
      : card
        ? `Card ${card.serial} handed over.`
        : 'Shown on screen and logged.',
  };
}

async function lockReceiver(
  { services, tx, actor, now }: Verb,
  wanted: Wanted,
  network: HandedNetwork,
): Promise<Receiver> {
  const vessel = actor.vesselId;
  if (wanted.guestId !== undefined) {
    if (network.audience === 'crew') throw invalid({ networkId: ['The crew network is not for guests'] });
    const guest = await services.db.row<{
      id: string;
      name: string | null;
      from_at: Date;
      until_at: Date;
      ashore_at: Date | null;
      erased_at: Date | null;
    }>(
      tx,
      'SELECT id, name, from_at, until_at, ashore_at, erased_at FROM guests WHERE id = $id AND vessel_id = $vessel FOR UPDATE',
      { id: wanted.guestId, vessel },
    );
    if (!guest) throw notFound();
    if (guest.ashore_at || guest.erased_at) {
      throw new AppError('not_now', 'This guest is ashore. Mark them back aboard first, then hand over.');
    }
    if (guest.until_at.getTime() <= now.getTime()) {
      throw new AppError('not_now', "This guest's time aboard is over. Give them a later end time first.");
    }
    return { kind: 'guest', id: guest.id, name: guest.name, from: guest.from_at };
  }
  const member = await services.db.row<{ id: string; name: string; signed_off_at: Date | null }>(
    tx,
    'SELECT id, name, signed_off_at FROM crew_members WHERE id = $id AND vessel_id = $vessel FOR UPDATE',
    { id: wanted.crewMemberId ?? null, vessel },
  );
  if (!member) throw notFound();
  if (member.signed_off_at) throw new AppError('not_now', 'This crew member has signed off.');
  return { kind: 'crew', id: member.id, name: member.name, from: now };
}

interface CardRow {
  id: string;
  serial: string;
  state: string;
  network_id: string;
  passphrase_id: string;
  guest_id: string | null;
  crew_member_id: string | null;
}

/** The card in hand, or the one printed for this person, now handed over. */
async function takeCard(
  { services, tx, actor, now }: Verb,
  wanted: Wanted,
  receiver: Receiver,
  passphraseId: string,
): Promise<{ id: string; serial: string }> {
  const bind = { vessel: actor.vesselId, network: wanted.networkId };
  const COLUMNS = 'id, serial, state, network_id, passphrase_id, guest_id, crew_member_id';
  const card = wanted.cardId
    ? await services.db.row<CardRow>(
        tx,
        `SELECT ${COLUMNS} FROM cards WHERE id = $card AND vessel_id = $vessel AND network_id = $network FOR UPDATE`,
        { ...bind, card: wanted.cardId },
      )
    : await services.db.row<CardRow>(
        tx,
        `SELECT ${COLUMNS} FROM cards WHERE vessel_id = $vessel AND network_id = $network AND passphrase_id = $passphrase
           AND $holder::uuid IN (guest_id, crew_member_id) AND state IN ('printed','handed_over')
         ORDER BY state = 'printed' DESC, printed_at DESC LIMIT 1 FOR UPDATE`,
        { ...bind, passphrase: passphraseId, holder: receiver.id },
      );
  if (!card) {
    if (wanted.cardId) throw notFound();
    throw new AppError(
      'not_now',
      'No card is printed for them yet. Print one, or show the code on the screen.',
    );
  }
  const owner = card.guest_id ?? card.crew_member_id;
  if (owner !== null && owner !== receiver.id) {
    throw new AppError(
      'conflict',
      `Card ${card.serial} was printed for somebody else. Take theirs, or print another.`,
    );
  }
  if (card.state !== 'printed' && card.state !== 'handed_over') {
    throw new AppError('conflict', `Card ${card.serial} no longer counts. Print a new one.`);
  }
  if (card.passphrase_id !== passphraseId) {
    throw new AppError(
      'conflict',
      `Card ${card.serial} carries a passphrase this person should not get: the change comes between. Print a new one.`,
    );
  }
  if (card.state === 'handed_over') await requireSameReceiver({ services, tx, actor, now }, card, receiver);
  else {
    await services.db.run(
      tx,
      "UPDATE cards SET state = 'handed_over', handed_over_at = $now WHERE id = $card AND vessel_id = $vessel",
      { now, card: card.id, vessel: actor.vesselId },
    );
  }
  return { id: card.id, serial: card.serial };
}

async function requireSameReceiver(
  { services, tx, actor }: Verb,
  card: CardRow,
  receiver: Receiver,
): Promise<void> {
  const theirs = await services.db.row(
    tx,
    'SELECT 1 FROM handovers WHERE vessel_id = $vessel AND card_id = $card AND holder_id = $holder AND undone_at IS NULL',
    { vessel: actor.vesselId, card: card.id, holder: receiver.id },
  );
  if (!theirs)
    throw new AppError('conflict', `Card ${card.serial} was handed to somebody else. Print another.`);
}
