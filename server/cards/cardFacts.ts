import type { RotationState } from '../../shared/api/common.ts';
import { CARD_LANGUAGES, type CardLanguage, validFromLine } from '../../shared/messages/card.ts';
import type { Audience } from '../../shared/rules/permissions.ts';
import { isUnderWay } from '../../shared/rules/rotation.ts';
import { type ZoneSpan, zoneAt } from '../../shared/rules/shipTime.ts';
import type { WifiSecurity } from '../../shared/rules/wifi.ts';
import { requireFresh } from '../auth/requireFresh.ts';
import { AppError, notFound } from '../errors.ts';
import { passphraseFor } from '../handovers/passphraseFor.ts';
import type { Verb } from '../http/verb.ts';
import { shipZones } from '../vessels/readVessel.ts';

/** What every card of one network has in common, before any passphrase is opened. */
export interface CardFacts {
  readonly vesselId: string;
  readonly vesselName: string;
  readonly cautionDock: boolean;
  readonly networkId: string;
  readonly ssid: string;
  readonly audience: Audience;
  readonly security: WifiSecurity;
  readonly hidden: boolean;
  readonly zones: readonly ZoneSpan[];
  readonly live: { readonly passphraseId: string; readonly since: Date } | null;
  readonly staged: { readonly passphraseId: string; readonly from: Date } | null;
  /** A change is on its way into the access points: the passphrase before may still be the one that works. */
  readonly underWay: boolean;
}

/** Which passphrase a card carries, and since or from when it is the right one. */
export interface Carried {
  readonly which: 'live' | 'staged';
  readonly passphraseId: string;
  readonly validFrom: Date;
}

interface FactsRow {
  vessel: string;
  source: string;
  ssid: string;
  audience: Audience;
  security: WifiSecurity;
  hidden: boolean;
  live_id: string | null;
  live_at: Date | null;
  staged_id: string | null;
  due_at: Date | null;
  state: RotationState | null;
}

/**
 * The facts of a network's cards. Throws `not_found` for another vessel's network; the owner's asks for a fresh
 * proof of identity.
 */
export async function cardFacts(context: Verb, networkId: string): Promise<CardFacts> {
  const { services, tx, actor } = context;
  const vesselId = actor.vesselId ?? '';
  const row = await services.db.row<FactsRow>(
    tx,
    `SELECT v.name AS vessel, v.source, n.ssid, n.audience, n.security, n.hidden, x.id AS live_id, x.live_at,
       r.to_passphrase_id AS staged_id, r.due_at, r.state
     FROM networks n JOIN vessels v ON v.id = n.vessel_id
     LEFT JOIN passphrases x ON x.network_id = n.id AND x.live_at IS NOT NULL AND x.retired_at IS NULL
     LEFT JOIN rotations r ON r.network_id = n.id AND r.to_passphrase_id IS NOT NULL
       AND r.state IN ('planned','staged','handed_out','applying','unknown','needs_somebody','reconciling')
     WHERE n.id = $network AND n.vessel_id = $vessel AND n.removed_at IS NULL`,
    { network: networkId, vessel: vesselId },
  );
  if (!row) throw notFound();
  if (row.audience === 'owner') requireFresh(context);
  return {
    vesselId,
    vesselName: row.vessel,
    cautionDock: row.source === 'dock',
    networkId,
    ssid: row.ssid,
    audience: row.audience,
    security: row.security,
    hidden: row.hidden,
    zones: await shipZones(services, tx, vesselId),
    live: row.live_id && row.live_at ? { passphraseId: row.live_id, since: row.live_at } : null,
    staged: row.staged_id && row.due_at ? { passphraseId: row.staged_id, from: row.due_at } : null,
    underWay: row.state !== null && isUnderWay(row.state),
  };
}

/** The passphrase for somebody aboard from `from` on, or the one asked for. Throws `not_now` when there is none. */
export function carried(facts: CardFacts, from: Date, asked?: 'live' | 'staged'): Carried {
  const { id, ssid, audience, live, staged } = { ...facts, id: facts.networkId };
  const which = asked ?? passphraseFor({ id, ssid, audience, live, staged }, from)?.which;
  if (which === 'staged' && staged)
    return { which, passphraseId: staged.passphraseId, validFrom: staged.from };
  if (which === 'live' && live) return { which, passphraseId: live.passphraseId, validFrom: live.since };
  throw new AppError(
    'not_now',
    asked === 'staged'
      ? `No next passphrase of “${facts.ssid}” is ready yet. Cards for it can be made once its change is staged.`
      : `No passphrase in force is on record for “${facts.ssid}”. Type it in on the network's page first.`,
  );
}

/** "From Sun 14 June, 11:00" in the card's language and ship's time. */
export function validLine(facts: CardFacts, { validFrom }: Carried, language: CardLanguage): string {
  return validFromLine(language, validFrom.toISOString(), zoneAt(facts.zones, validFrom));
}

/** The language a person's card is printed in: their own where cards are printed in it, else English. */
export function languageOfCard(language: string | null): CardLanguage {
  return CARD_LANGUAGES.find((one) => one === language) ?? 'en';
}
