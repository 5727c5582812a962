import { randomUUID } from 'node:crypto';
import type { CardInput } from '../../print/cards.ts';
import type { CardFormat } from '../../shared/api/common.ts';
import type { CardLanguage } from '../../shared/messages/card.ts';
import { wifiPayload } from '../../shared/rules/wifi.ts';
import { appendLog } from '../handovers/appendLog.ts';
import { recordHandover } from '../handovers/recordHandover.ts';
import type { FileReply } from '../http/reply.ts';
import type { Verb } from '../http/verb.ts';
import { holderOf } from '../passphrases/reveal.ts';
import { openPassphrase } from '../passphrases/sealPassphrase.ts';
import { byActor } from '../rotations/by.ts';
import { type CardFacts, type Carried, carried, languageOfCard, validLine } from './cardFacts.ts';
import { drawCards } from './drawCards.ts';
import { takeSerials } from './serials.ts';

/** Somebody, or nobody yet, a card is printed for. */
export interface Bearer {
  readonly guestId: string | null;
  readonly crewMemberId: string | null;
  readonly name: string | null;
  readonly cabin: string | null;
  readonly language: string | null;
  readonly from: Date;
  /** Where this person is in the request, to say whose card cannot be printed. */
  readonly field: string;
}

interface NewCard {
  readonly id: string;
  readonly serial: string;
  readonly language: CardLanguage;
  readonly bearer: Bearer;
  readonly which: Carried;
}

export interface Making {
  readonly bearers: readonly Bearer[];
  readonly language: CardLanguage | undefined;
  readonly which: 'live' | 'staged' | undefined;
  readonly voids: readonly { readonly id: string; readonly serial: string; readonly passphrase_id: string }[];
}

/**
 * Takes serials, writes the cards and the log, then opens the passphrases and draws the file, all in the caller's
 * transaction: whatever fails leaves no card printed, none of the earlier ones void, and no serial used up.
 */
export async function makeCards(
  context: Verb,
  facts: CardFacts,
  format: CardFormat,
  making: Making,
): Promise<FileReply> {
  const { services, tx } = context;
  const cards = await writeCards(context, facts, format, making);
  await logPrint(context, facts, format, cards, making.voids);
  const passphrases = new Map<string, string>();
  for (const { which } of cards) {
    if (!passphrases.has(which.passphraseId))
      passphrases.set(which.passphraseId, await openPassphrase(services, tx, which.passphraseId));
  }
  const toDraw = cards.map((card) => ({
    input: cardInput(facts, card, passphrases.get(card.which.passphraseId) ?? ''),
    field: card.bearer.field,
  }));
  return {
    contentType: 'application/pdf',
    filename:
      cards.length === 1
        ? `Card ${cards[0]?.serial}.pdf`
        : `Cards ${cards[0]?.serial} to ${cards.at(-1)?.serial}.pdf`,
    body: await drawCards(format, toDraw),
  };
}

function cardInput(
  facts: CardFacts,
  { serial, language, bearer, which }: NewCard,
  passphrase: string,
): CardInput {
  const { vesselName, audience, ssid, security, hidden, cautionDock } = facts;
  return {
    serial,
    vesselName,
    audience,
    ssid,
    passphrase,
    payload: wifiPayload({ ssid, passphrase, security, hidden }),
    language,
    validFrom: validLine(facts, which, language),
    guestName: bearer.name,
    cabin: bearer.cabin,
    cautionDock,
  };
}

async function writeCards(
  { services, tx, actor, now }: Verb,
  facts: CardFacts,
  format: CardFormat,
  { bearers, language, which, voids }: Making,
): Promise<NewCard[]> {
  const carries = bearers.map((bearer) => carried(facts, bearer.from, which));
  const serials = await takeSerials(services, tx, facts.vesselId, bearers.length);
  const cards = bearers.map((bearer, index): NewCard => {
    const [serial, passphrase] = [serials[index], carries[index]];
    if (!serial || !passphrase) throw new Error('A card was left without a serial');
    return {
      id: randomUUID(),
      serial,
      language: language ?? languageOfCard(bearer.language),
      bearer,
      which: passphrase,
    };
  });
  await services.db.run(
    tx,
    `UPDATE cards SET state = 'void', ended_at = $now WHERE vessel_id = $vessel AND id = ANY($ids::uuid[])`,
    { vessel: facts.vesselId, ids: voids.map(({ id }) => id), now },
  );
  await services.db.run(
    tx,
    `INSERT INTO cards(id, vessel_id, network_id, passphrase_id, serial, format, language, guest_id, crew_member_id, state, printed_at, printed_by)
     SELECT id, $vessel, $network, passphrase_id, serial, $format, language, guest_id, crew_member_id, 'printed', $now, $by
     FROM jsonb_to_recordset($cards::jsonb) AS c(id uuid, passphrase_id uuid, serial text, language text, guest_id uuid, crew_member_id uuid)`,
    {
      vessel: facts.vesselId,
      network: facts.networkId,
      format: format === 'cabin' ? 'cabin' : 'wallet',
      now,
      by: actor.personId,
      cards: JSON.stringify(
        cards.map(({ id, serial, language: words, bearer, which: { passphraseId } }) => ({
          id,
          serial,
          language: words,
          passphrase_id: passphraseId,
          guest_id: bearer.guestId,
          crew_member_id: bearer.crewMemberId,
        })),
      ),
    },
  );
  return cards;
}

/** Who prints a card has read it: they are a holder from now on. */
async function logPrint(
  context: Verb,
  facts: CardFacts,
  format: CardFormat,
  cards: readonly NewCard[],
  voids: Making['voids'],
): Promise<void> {
  const { services, tx, actor, now } = context;
  const { vesselId, networkId } = facts;
  const by = byActor(context).actor;
  await appendLog(services, tx, [
    ...voids.map(({ id, serial, passphrase_id: passphraseId }) => ({
      vesselId,
      kind: 'card.void' as const,
      at: now,
      networkId,
      passphraseId,
      subject: { kind: 'card' as const, id },
      actor: by,
      body: { serial, why: 'printed again' },
    })),
    ...cards.map(({ id, serial, language, which }) => ({
      vesselId,
      kind: 'card.printed' as const,
      at: now,
      networkId,
      passphraseId: which.passphraseId,
      subject: { kind: 'card' as const, id },
      actor: by,
      body: { serial, format, language },
    })),
  ]);
  const holder = await holderOf(services, tx, vesselId, actor.personId);
  for (const passphraseId of new Set(cards.map(({ which }) => which.passphraseId))) {
    const given = { vesselId, networkId, passphraseId, holder, channel: 'reveal' as const };
    await recordHandover(services, tx, { ...given, byPerson: actor.personId, at: now });
  }
}
