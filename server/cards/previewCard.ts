import type { CardPreview } from '../../shared/api/cards.ts';
import type { CardLanguage } from '../../shared/messages/card.ts';
import { partsForReading } from '../../shared/rules/passphrase.ts';
import { wifiPayload } from '../../shared/rules/wifi.ts';
import { notFound } from '../errors.ts';
import { appendLog } from '../handovers/appendLog.ts';
import { lockLog } from '../handovers/lockLog.ts';
import { recordHandover } from '../handovers/recordHandover.ts';
import { ABSOLUTE_MS } from '../http/session.ts';
import type { Verb } from '../http/verb.ts';
import { holderOf } from '../passphrases/reveal.ts';
import { openPassphrase } from '../passphrases/sealPassphrase.ts';
import { type CardFacts, cardFacts, carried, languageOfCard, validLine } from './cardFacts.ts';
import { readyCard } from './serials.ts';

/**
 * A card as it would be printed, for the panel beside the party's list. Who looks at it has seen the passphrase:
 * that is in the log and among the holders before anything is opened, once a session and passphrase, so that
 * going down the list writes no line a guest.
 */
export async function previewCard(
  context: Verb,
  networkId: string,
  asked: {
    readonly guestId?: string | undefined;
    readonly language?: CardLanguage | undefined;
    readonly which?: 'live' | 'staged' | undefined;
  },
): Promise<CardPreview> {
  const { services, tx, now } = context;
  const facts = await cardFacts(context, networkId);
  const guest = asked.guestId ? await guestForCard(context, asked.guestId) : null;
  const which = carried(facts, guest?.from_at ?? now, asked.which);
  const language = asked.language ?? languageOfCard(guest?.language ?? null);
  await writeDown(context, facts, which.passphraseId);
  const card = await readyCard(services, tx, {
    vesselId: facts.vesselId,
    passphraseId: which.passphraseId,
    guestId: asked.guestId,
  });
  const passphrase = await openPassphrase(services, tx, which.passphraseId);
  const { ssid, security, hidden, audience, vesselName, underWay, cautionDock } = facts;
  return {
    vesselName,
    audience,
    ssid,
    security,
    hidden,
    passphrase,
    parts: partsForReading(passphrase),
    payload: wifiPayload({ ssid, passphrase, security, hidden }),
    language,
    validFrom: validLine(facts, which, language),
    which: which.which,
    underWay,
    card: { id: card.id, serial: card.serial, printed: card.id !== null },
    cautionDock,
  };
}

export interface GuestForCard {
  readonly id: string;
  readonly name: string | null;
  readonly label: string;
  readonly language: string;
  readonly from_at: Date;
  readonly cabin: string | null;
}

/** One guest or visitor of the vessel. Throws `not_found`. */
export async function guestForCard(context: Verb, guestId: string): Promise<GuestForCard> {
  const [guest] = await guestsForCards(context, [guestId]);
  if (!guest) throw notFound();
  return guest;
}

/** Guests in the order asked for. Throws `not_found` when one of them is not this vessel's. */
export async function guestsForCards(
  { services, tx, actor }: Verb,
  ids: readonly string[],
): Promise<GuestForCard[]> {
  const wanted = [...new Set(ids.map((id) => id.toLowerCase()))];
  const rows = await services.db.rows<GuestForCard>(
    tx,
    `SELECT g.id, g.name, g.label, g.language, g.from_at, c.name AS cabin FROM guests g LEFT JOIN cabins c ON c.id = g.cabin_id
     WHERE g.vessel_id = $vessel AND g.id = ANY($ids::uuid[]) AND g.erased_at IS NULL ORDER BY array_position($ids::uuid[], g.id)`,
    { vessel: actor.vesselId, ids: wanted },
  );
  if (rows.length !== wanted.length) throw notFound();
  return rows;
}

async function writeDown(
  { services, tx, actor, now }: Verb,
  facts: CardFacts,
  passphraseId: string,
): Promise<void> {
  const { vesselId, networkId } = facts;
  // A session lives at most this long, so no older entry can be one of it.
  const known = await services.db.row(
    tx,
    `SELECT 1 FROM log_entries WHERE vessel_id = $vessel AND at >= $since AND kind = 'passphrase.revealed'
       AND passphrase_id = $passphrase AND actor_id = $actor AND body->>'session' = $session LIMIT 1`,
    {
      vessel: vesselId,
      since: new Date(now.getTime() - ABSOLUTE_MS),
      passphrase: passphraseId,
      actor: actor.personId,
      session: actor.sessionPublicId,
    },
  );
  if (known) return;
  await lockLog(services, tx, vesselId);
  const holder = await holderOf(services, tx, vesselId, actor.personId);
  await appendLog(services, tx, [
    {
      vesselId,
      kind: 'passphrase.revealed',
      at: now,
      networkId,
      passphraseId,
      subject: { kind: holder.kind, id: holder.id, name: actor.name },
      actor: { id: actor.personId, name: actor.name },
      body: { on: 'card preview', session: actor.sessionPublicId },
    },
  ]);
  await recordHandover(services, tx, {
    vesselId,
    networkId,
    passphraseId,
    holder,
    channel: 'reveal',
    byPerson: actor.personId,
    at: now,
  });
}
