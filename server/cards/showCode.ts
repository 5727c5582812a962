import type { ShownCode } from '../../shared/api/cards.ts';
import { type CardLanguage, language } from '../../shared/api/common.ts';
import { UNDO_SECONDS } from '../../shared/rules/limits.ts';
import { partsForReading } from '../../shared/rules/passphrase.ts';
import { wifiPayload } from '../../shared/rules/wifi.ts';
import { appendLog } from '../handovers/appendLog.ts';
import { lockLog } from '../handovers/lockLog.ts';
import { recordHandoverOnce } from '../handovers/recordHandover.ts';
import type { Verb } from '../http/verb.ts';
import { openPassphrase } from '../passphrases/sealPassphrase.ts';
import { byActor } from '../rotations/by.ts';
import { cardFacts, carried, languageOfCard, validLine } from './cardFacts.ts';
import { guestForCard } from './previewCard.ts';

/**
 * Shows a guest the code on the screen. The handover and its log line are written before anything is opened;
 * a second showing is a second line but the same handover.
 * @param asked the language it is shown in; the guest's own, or English, unless said.
 */
export async function showCode(
  context: Verb,
  networkId: string,
  guestId: string,
  asked?: CardLanguage | undefined,
): Promise<ShownCode> {
  const { services, tx, actor, now } = context;
  const facts = await cardFacts(context, networkId);
  const { vesselId, ssid, security, hidden } = facts;
  await lockLog(services, tx, vesselId);
  const guest = await guestForCard(context, guestId);
  const which = carried(facts, guest.from_at);
  const { passphraseId } = which;
  await appendLog(services, tx, [
    {
      vesselId,
      kind: 'handover.screen',
      at: now,
      networkId,
      passphraseId,
      subject: { kind: 'guest', id: guest.id, name: guest.name },
      actor: byActor(context).actor,
      body: { language: guest.language },
    },
  ]);
  const handover = await recordHandoverOnce(services, tx, {
    vesselId,
    networkId,
    passphraseId,
    holder: { kind: 'guest', id: guest.id },
    channel: 'screen',
    byPerson: actor.personId,
    at: now,
  });
  const passphrase = await openPassphrase(services, tx, passphraseId);
  return {
    handoverId: handover.id,
    at: handover.at.toISOString(),
    undoUntil: new Date(handover.at.getTime() + UNDO_SECONDS * 1000).toISOString(),
    ssid,
    security,
    hidden,
    passphrase,
    parts: partsForReading(passphrase),
    payload: wifiPayload({ ssid, passphrase, security, hidden }),
    language: language.catch('en').parse(guest.language),
    validFrom: validLine(facts, which, asked ?? languageOfCard(guest.language)),
    which: which.which,
    underWay: facts.underWay,
    cautionDock: facts.cautionDock,
  };
}
