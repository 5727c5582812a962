import { type CardState, type CardView, cardState } from '../../shared/api/cards.ts';
import { AUDIENCES, type Audience, may, printAction } from '../../shared/rules/permissions.ts';
import { notFound } from '../errors.ts';
import { readCursor, writeCursor } from '../http/cursor.ts';
import type { Verb } from '../http/verb.ts';
import { languageOfCard } from './cardFacts.ts';

interface CardRow {
  id: string;
  serial: string;
  network_id: string;
  ssid: string;
  audience: Audience;
  format: 'wallet' | 'cabin';
  language: string;
  state: CardState;
  person_kind: 'guest' | 'crew' | null;
  person_id: string | null;
  person: string | null;
  carries: 'live' | 'staged' | 'retired';
  printed_at: Date;
  handed_over_at: Date | null;
  ended_at: Date | null;
}

// Whose a card is: who was given it, else for whom it was printed.
const CARDS = `
SELECT c.id, c.serial, c.network_id, n.ssid, n.audience, c.format, c.language, c.state, c.printed_at, c.handed_over_at, c.ended_at,
  CASE WHEN x.retired_at IS NOT NULL THEN 'retired' WHEN x.live_at IS NOT NULL THEN 'live' ELSE 'staged' END AS carries,
  CASE WHEN g.id IS NOT NULL THEN 'guest' WHEN m.id IS NOT NULL THEN 'crew' END AS person_kind,
  coalesce(g.id, m.id) AS person_id, coalesce(g.name, g.label, m.name) AS person
FROM cards c JOIN networks n ON n.id = c.network_id JOIN passphrases x ON x.id = c.passphrase_id
LEFT JOIN LATERAL (SELECT o.holder_kind, o.holder_id FROM handovers o
  WHERE o.passphrase_id = c.passphrase_id AND o.card_id = c.id AND o.undone_at IS NULL ORDER BY o.at DESC LIMIT 1) h ON true
LEFT JOIN guests g ON g.id = CASE WHEN h.holder_kind = 'guest' THEN h.holder_id WHEN h.holder_id IS NULL THEN c.guest_id END
LEFT JOIN crew_members m ON m.id = CASE WHEN h.holder_kind = 'crew' THEN h.holder_id WHEN h.holder_id IS NULL THEN c.crew_member_id END`;

/** Networks whose cards the person asking may see: those they may print for. */
const seenBy = ({ actor }: Verb): Audience[] =>
  AUDIENCES.filter((audience) => may(actor.roles, printAction(audience)));

/** A page of the vessel's cards, newest first, and how many there are in each state. */
export async function listCards(
  context: Verb,
  asked: {
    readonly state?: CardState | undefined;
    readonly networkId?: string | undefined;
    readonly after?: string | undefined;
    readonly limit: number;
  },
): Promise<{ cards: CardView[]; after: string | null; counts: Record<CardState, number> }> {
  const { services, tx, actor } = context;
  const list = { name: 'cards', vesselId: actor.vesselId };
  const [at = null, id = null] = asked.after ? readCursor(services, list, asked.after) : [];
  const scope = { vessel: actor.vesselId, audiences: seenBy(context), network: asked.networkId ?? null };
  const rows = await services.db.rows<CardRow>(
    tx,
    `${CARDS} WHERE c.vessel_id = $vessel AND n.audience = ANY($audiences) AND ($network::uuid IS NULL OR c.network_id = $network::uuid)
       AND ($state::text IS NULL OR c.state = $state) AND ($at::timestamptz IS NULL OR (c.printed_at, c.id) < ($at::timestamptz, $id::uuid))
     ORDER BY c.printed_at DESC, c.id DESC LIMIT $limit`,
    { ...scope, state: asked.state ?? null, at, id, limit: asked.limit + 1 },
  );
  const counted = await services.db.rows<{ state: CardState; count: number }>(
    tx,
    `SELECT c.state, count(*)::int AS count FROM cards c JOIN networks n ON n.id = c.network_id
     WHERE c.vessel_id = $vessel AND n.audience = ANY($audiences) AND ($network::uuid IS NULL OR c.network_id = $network::uuid)
     GROUP BY c.state`,
    scope,
  );
  const page = rows.slice(0, asked.limit);
  const last = page.at(-1);
  const more = rows.length > asked.limit && last;
  const counts = Object.fromEntries(cardState.options.map((state) => [state, 0])) as Record<
    CardState,
    number
  >;
  for (const { state, count } of counted) counts[state] = count;
  return {
    cards: page.map(presentCard),
    after: more ? writeCursor(services, list, [last.printed_at.toISOString(), last.id]) : null,
    counts,
  };
}

/** One card as the list shows it. Throws `not_found`. */
export async function viewCard(context: Verb, cardId: string): Promise<CardView> {
  const row = await context.services.db.row<CardRow>(
    context.tx,
    `${CARDS} WHERE c.vessel_id = $vessel AND c.id = $card`,
    { vessel: context.actor.vesselId, card: cardId },
  );
  if (!row) throw notFound();
  return presentCard(row);
}

function presentCard(row: CardRow): CardView {
  const { person_kind: kind, person_id: id } = row;
  return {
    id: row.id,
    serial: row.serial,
    networkId: row.network_id,
    network: row.ssid,
    audience: row.audience,
    format: row.format,
    language: languageOfCard(row.language),
    state: row.state,
    person: kind && id ? { kind, id, name: row.person ?? '' } : null,
    carries: row.carries,
    printedAt: row.printed_at.toISOString(),
    handedOverAt: row.handed_over_at?.toISOString() ?? null,
    endedAt: row.ended_at?.toISOString() ?? null,
  };
}
