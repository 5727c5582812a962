import { randomUUID } from 'node:crypto';
import { AppError, notFound } from '../errors.ts';
import { refuseInNote } from '../passphrases/refuseInNote.ts';
import { lockNetwork } from '../rotations/lockRotation.ts';
import { replanNetwork } from '../rotations/replan.ts';
import type { Change } from '../vessels/change.ts';
import { log } from './changeNetworks.ts';

/** Writes down that the passphrase in force leaked: the network is exposed, and its change moves up. */
export async function reportLeak(change: Change, networkId: string, note: string | undefined): Promise<void> {
  const { services, tx, vesselId, actor, now } = change;
  await lockNetwork(services, tx, vesselId, networkId);
  await refuseInNote(services, tx, networkId, note);
  const live = await services.db.row<{ id: string }>(
    tx,
    'SELECT id FROM passphrases WHERE network_id = $network AND vessel_id = $vessel AND live_at IS NOT NULL AND retired_at IS NULL',
    { network: networkId, vessel: vesselId },
  );
  if (!live)
    throw new AppError(
      'not_now',
      'No passphrase in force is on record for this network, so there is nothing that could leak.',
    );
  await services.db.run(
    tx,
    `INSERT INTO leaks(id, vessel_id, network_id, passphrase_id, kind, note, at, by_person) VALUES ($id, $vessel, $network, $passphrase, 'reported', $note, $now, $by)`,
    {
      id: randomUUID(),
      vessel: vesselId,
      network: networkId,
      passphrase: live.id,
      note: note ?? null,
      now,
      by: actor.personId,
    },
  );
  await log(change, { kind: 'leak.reported', networkId, passphraseId: live.id });
  await replanNetwork(services, tx, networkId, now);
}

/** Takes back a report that was a mistake. A lost card is taken back where the card was marked. */
export async function withdrawLeak(change: Change, networkId: string, leakId: string): Promise<void> {
  const { services, tx, vesselId, now } = change;
  await lockNetwork(services, tx, vesselId, networkId);
  const [withdrawn] = await services.db.run<{ passphrase_id: string }>(
    tx,
    `UPDATE leaks SET withdrawn_at = $now WHERE id = $id AND network_id = $network AND vessel_id = $vessel AND kind = 'reported' AND withdrawn_at IS NULL RETURNING passphrase_id`,
    { id: leakId, network: networkId, vessel: vesselId, now },
  );
  if (!withdrawn) throw notFound();
  await log(change, { kind: 'leak.withdrawn', networkId, passphraseId: withdrawn.passphrase_id });
  await replanNetwork(services, tx, networkId, now);
}
