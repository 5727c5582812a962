import type { EntrySheet } from '../../shared/api/rotations.ts';
import { partsForReading } from '../../shared/rules/passphrase.ts';
import { requireFresh } from '../auth/requireFresh.ts';
import { AppError } from '../errors.ts';
import { appendLog } from '../handovers/appendLog.ts';
import { recordHandover } from '../handovers/recordHandover.ts';
import type { Verb } from '../http/verb.ts';
import { holderOf } from '../passphrases/reveal.ts';
import { openPassphrase } from '../passphrases/sealPassphrase.ts';
import { byActor } from './by.ts';
import { crossingUntil, SHEET_REPORTS_WITHIN_MS } from './handOut.ts';
import { lockRotation } from './lockRotation.ts';
import { presentTargets } from './present.ts';
import { rotationEvent, takeStep } from './takeStep.ts';

/**
 * Opens the entry sheet. "Handed out" is stored, the opening is in the log and the opener among the holders
 * before the passphrase is opened, and the request's transaction commits before its first octet is answered.
 */
export async function openSheet(context: Verb, rotationId: string): Promise<EntrySheet> {
  const { services, tx, actor, now } = context;
  const by = byActor(context);
  const known = await lockRotation(services, tx, actor.vesselId ?? '', rotationId);
  if (known.audience === 'owner') requireFresh(context);
  let open = known;
  const { state } = known.rotation;
  if (state === 'staged' && known.rotation.driver !== 'by_hand') {
    throw new AppError(
      'not_now',
      'The boat carries this change out by itself when it is due. The entry sheet opens if that fails.',
    );
  }
  if (state === 'staged' || (known.rotation.handedOutAt === null && state === 'needs_somebody')) {
    const crossing =
      known.carriesEquipment && (await crossingUntil(services, tx, known.vesselId, now)) !== null;
    const reportBy = new Date(now.getTime() + SHEET_REPORTS_WITHIN_MS);
    open = await takeStep(services, tx, known, { kind: 'handOut', reportBy, crossing }, by);
  } else if (!['handed_out', 'applying', 'unknown', 'needs_somebody'].includes(state)) {
    throw new AppError(
      'conflict',
      'There is nothing to enter for this change just now. Reload to see where it stands.',
    );
  }
  const { to, from } = open.rotation;
  if (to === null) throw new AppError('conflict', 'This change has no passphrase yet.');
  open = await takeStep(services, tx, open, { kind: 'disclose', way: 'officer' }, by);
  await appendLog(services, tx, [rotationEvent(open, 'rotation.sheet_opened', by)]);
  await recordHandover(services, tx, {
    vesselId: open.vesselId,
    networkId: open.networkId,
    passphraseId: to,
    holder: await holderOf(services, tx, open.vesselId, actor.personId),
    channel: 'entry_sheet',
    byPerson: actor.personId,
    at: now,
  });
  const passphrase = await openPassphrase(services, tx, to);
  return {
    rotationId: open.id,
    ssid: open.ssid,
    security: open.security,
    hidden: open.hidden,
    passphrase,
    parts: partsForReading(passphrase),
    goingBack: from !== null && (await cameBefore(context, to, from)),
    accessPoints: await presentTargets(services, tx, open.id),
  };
}

/** Whether the target is older than what it replaces: a change that goes back. */
async function cameBefore({ services, tx }: Verb, to: string, from: string): Promise<boolean> {
  const row = await services.db.row<{ back: boolean }>(
    tx,
    'SELECT t.generation < f.generation AS back FROM passphrases t, passphrases f WHERE t.id = $to AND f.id = $from',
    { to, from },
  );
  return row?.back ?? false;
}
