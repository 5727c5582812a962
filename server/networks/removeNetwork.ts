import { AppError, notFound } from '../errors.ts';
import { appendLog, type LogEvent } from '../handovers/appendLog.ts';
import { dropStaged } from '../rotations/cancelRotation.ts';
import { voidCards } from '../rotations/comeIntoForce.ts';
import { lockNetwork, lockRotation } from '../rotations/lockRotation.ts';
import { takeStep } from '../rotations/takeStep.ts';
import type { Change } from '../vessels/change.ts';

/**
 * Takes a network away: what was planned for it is cancelled, its passphrases are retired and its cards void, and
 * its log stays. Refused while a change is under way, because nobody could then finish it.
 */
export async function removeNetwork(change: Change, networkId: string): Promise<void> {
  const { services, tx, vesselId, actor, now } = change;
  const by = { now, actor: { id: actor.personId, name: actor.name } };
  await lockNetwork(services, tx, vesselId, networkId);
  const rotations = await services.db.rows<{ id: string }>(
    tx,
    `SELECT id FROM rotations WHERE network_id = $network AND vessel_id = $vessel
       AND state NOT IN ('retired','cancelled','superseded') ORDER BY id`,
    { network: networkId, vessel: vesselId },
  );
  for (const { id } of rotations) {
    const known = await lockRotation(services, tx, vesselId, id);
    const { state, takesOver } = known.rotation;
    if (state === 'live' || state === 'drifted') {
      await takeStep(services, tx, known, { kind: 'retire' }, by);
    } else if ((state === 'planned' || state === 'staged') && !takesOver) {
      await dropStaged(services, tx, await takeStep(services, tx, known, { kind: 'cancel' }, by), by);
    } else {
      throw new AppError(
        'not_now',
        "A change of this network's passphrase is under way. Finish or give it up before you remove it.",
      );
    }
  }
  await retireAll(change, networkId);
  const removed = await services.db.run(
    tx,
    'UPDATE networks SET removed_at = $now, updated_at = $now WHERE id = $network AND vessel_id = $vessel AND removed_at IS NULL RETURNING 1',
    { network: networkId, vessel: vesselId, now },
  );
  if (removed.length === 0) throw notFound();
  await appendLog(services, tx, [{ vesselId, kind: 'network.removed', at: now, networkId, actor: by.actor }]);
}

async function retireAll({ services, tx, vesselId, actor, now }: Change, networkId: string): Promise<void> {
  const by = { id: actor.personId, name: actor.name };
  const retired = await services.db.run<{ id: string }>(
    tx,
    'UPDATE passphrases SET retired_at = $now WHERE network_id = $network AND vessel_id = $vessel AND retired_at IS NULL RETURNING id',
    { network: networkId, vessel: vesselId, now },
  );
  const ids = retired.map(({ id }) => id);
  const cards = await voidCards(services, tx, ids, now);
  const about = { vesselId, at: now, networkId, actor: by };
  await appendLog(services, tx, [
    ...ids.map((id): LogEvent => ({ ...about, kind: 'passphrase.retired', passphraseId: id })),
    ...cards.map(
      (card): LogEvent => ({
        ...about,
        kind: 'card.void',
        passphraseId: card.passphraseId,
        subject: { kind: 'card', id: card.id },
        body: { serial: card.serial },
      }),
    ),
  ]);
}
