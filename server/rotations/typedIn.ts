import type { RotationState } from '../../shared/api/common.ts';
import { isUnderWay } from '../../shared/rules/rotation.ts';
import type { Tx } from '../db/connection.ts';
import { AppError } from '../errors.ts';
import { appendLog } from '../handovers/appendLog.ts';
import type { Services } from '../services.ts';
import type { By } from './by.ts';
import { voidCards } from './comeIntoForce.ts';
import { lockNetwork } from './lockRotation.ts';
import { replanNetwork } from './replan.ts';

/**
 * A passphrase that a person says is in force already takes the place of the one on record: that one is retired and
 * its cards are void. Refused while a change is under way, whose outcome decides instead; a staged change stays, but
 * must then have come from the one that is retired here, so it is refused as well.
 */
export async function comeIntoForceByHand(
  services: Services,
  tx: Tx,
  given: { vesselId: string; networkId: string; passphraseId: string; since: Date },
  by: By,
): Promise<void> {
  const { db } = services;
  await lockNetwork(services, tx, given.vesselId, given.networkId);
  const open = await db.row<{ state: RotationState }>(
    tx,
    `SELECT state FROM rotations WHERE network_id = $network AND state IN ('staged','handed_out','applying','unknown','needs_somebody','reconciling')`,
    { network: given.networkId },
  );
  if (open) {
    throw new AppError(
      'not_now',
      isUnderWay(open.state)
        ? 'A change of this passphrase is under way. Finish or give it up first.'
        : 'A new passphrase is staged already, and its cards may be printed. Cancel that change first.',
    );
  }
  const bind = { network: given.networkId, vessel: given.vesselId, id: given.passphraseId, now: by.now };
  const retired = await db.run<{ id: string }>(
    tx,
    `UPDATE passphrases SET retired_at = $now WHERE network_id = $network AND vessel_id = $vessel AND id <> $id
       AND live_at IS NOT NULL AND retired_at IS NULL RETURNING id`,
    bind,
  );
  await db.run(
    tx,
    `UPDATE rotations SET state = 'retired', ended_at = $now, updated_at = $now WHERE network_id = $network AND vessel_id = $vessel AND state IN ('live','drifted')`,
    {
      network: given.networkId,
      vessel: given.vesselId,
      now: by.now,
    },
  );
  await db.run(
    tx,
    'UPDATE passphrases SET live_at = $since WHERE id = $id AND vessel_id = $vessel AND network_id = $network',
    { id: given.passphraseId, vessel: given.vesselId, network: given.networkId, since: given.since },
  );
  const cards = await voidCards(
    services,
    tx,
    retired.map(({ id }) => id),
    by.now,
  );
  await appendLog(services, tx, [
    ...retired.map(({ id }) => ({
      vesselId: given.vesselId,
      kind: 'passphrase.retired' as const,
      at: by.now,
      networkId: given.networkId,
      passphraseId: id,
      actor: by.actor,
    })),
    ...cards.map((card) => ({
      vesselId: given.vesselId,
      kind: 'card.void' as const,
      at: by.now,
      networkId: given.networkId,
      passphraseId: card.passphraseId,
      subject: { kind: 'card' as const, id: card.id },
      actor: by.actor,
      body: { serial: card.serial },
    })),
  ]);
  await replanNetwork(services, tx, given.networkId, by.now);
}
