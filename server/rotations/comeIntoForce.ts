import type { Tx } from '../db/connection.ts';
import { appendLog, type LogEvent } from '../handovers/appendLog.ts';
import type { Services } from '../services.ts';
import type { By } from './by.ts';
import type { KnownRotation } from './lockRotation.ts';
import { replanNetwork } from './replan.ts';

/**
 * What follows when every access point is verified: the new passphrase is the one in force, the others of the
 * network are retired (which closes their leaks and ends their exposure; their holders stay as history), cards
 * that carry a retired one are void, and the plan sets the next change.
 */
export async function comeIntoForce(services: Services, tx: Tx, known: KnownRotation, by: By): Promise<void> {
  await retirePassphrases(services, tx, known, by);
  await services.db.run(
    tx,
    'UPDATE passphrases SET live_at = coalesce(live_at, $now) WHERE id = $id AND vessel_id = $vessel',
    { id: known.rotation.to, vessel: known.vesselId, now: by.now },
  );
  await replanNetwork(services, tx, known.networkId, by.now);
}

/** Retires what was in force or tried on this network, except the passphrase that is now in force. */
async function retirePassphrases(services: Services, tx: Tx, known: KnownRotation, by: By): Promise<void> {
  const { db } = services;
  const bind = { network: known.networkId, vessel: known.vesselId, keep: known.rotation.to };
  const retired = await db.run<{ id: string }>(
    tx,
    `UPDATE passphrases SET retired_at = $now
     WHERE network_id = $network AND vessel_id = $vessel AND id <> $keep AND retired_at IS NULL
       AND (live_at IS NOT NULL OR id = $from::uuid) RETURNING id`,
    { ...bind, now: by.now, from: known.rotation.from },
  );
  const cards = await voidCards(
    services,
    tx,
    retired.map((row) => row.id),
    by.now,
  );
  const events: LogEvent[] = [
    ...retired.map(
      ({ id }): LogEvent => ({
        vesselId: known.vesselId,
        kind: 'passphrase.retired',
        at: by.now,
        networkId: known.networkId,
        passphraseId: id,
        subject: { kind: 'rotation', id: known.id },
        actor: by.actor,
      }),
    ),
    ...cards.map(
      (card): LogEvent => ({
        vesselId: known.vesselId,
        kind: 'card.void',
        at: by.now,
        networkId: known.networkId,
        passphraseId: card.passphraseId,
        subject: { kind: 'card', id: card.id },
        actor: by.actor,
        body: { serial: card.serial },
      }),
    ),
  ];
  await appendLog(services, tx, events);
}

/** Makes the printed and handed-over cards of these passphrases void. */
export async function voidCards(
  services: Services,
  tx: Tx,
  passphraseIds: readonly string[],
  now: Date,
): Promise<{ id: string; serial: string; passphraseId: string }[]> {
  if (passphraseIds.length === 0) return [];
  const rows = await services.db.run<{ id: string; serial: string; passphrase_id: string }>(
    tx,
    `UPDATE cards SET state = 'void', ended_at = $now
     WHERE passphrase_id = ANY($ids::uuid[]) AND state IN ('printed','handed_over') RETURNING id, serial, passphrase_id`,
    { ids: passphraseIds, now },
  );
  return rows.map((row) => ({ id: row.id, serial: row.serial, passphraseId: row.passphrase_id }));
}
