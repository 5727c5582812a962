import { UNDO_SECONDS } from '../../shared/rules/limits.ts';
import { type Audience, handOverAction, may } from '../../shared/rules/permissions.ts';
import { AppError, forbidden, notFound } from '../errors.ts';
import type { Verb } from '../http/verb.ts';
import { appendLog, type SubjectKind } from './appendLog.ts';
import { lockLog } from './lockLog.ts';

/** The server waits this much longer than the screen, for the way the request takes. In milliseconds. */
const GRACE_MS = 5_000;

interface Row {
  audience: Audience;
  network_id: string;
  passphrase_id: string;
  holder_kind: SubjectKind;
  holder_id: string;
  channel: string;
  card_id: string | null;
  serial: string | null;
  at: Date;
  undone_at: Date | null;
  name: string | null;
}

/** Takes a handover of the last seconds back: nobody holds what they were not given. A repeat changes nothing. */
export async function undoHandover(
  { services, tx, actor, now }: Verb,
  handoverId: string,
): Promise<{ handoverId: string; undoneAt: string }> {
  const { db } = services;
  const vesselId = actor.vesselId ?? '';
  await lockLog(services, tx, vesselId);
  const row = await db.row<Row>(
    tx,
    `SELECT n.audience, h.network_id, h.passphrase_id, h.holder_kind, h.holder_id, h.channel, h.card_id, k.serial, h.at,
       h.undone_at, coalesce(g.name, c.name) AS name
     FROM handovers h JOIN networks n ON n.id = h.network_id LEFT JOIN cards k ON k.id = h.card_id
     LEFT JOIN guests g ON g.id = h.holder_id LEFT JOIN crew_members c ON c.id = h.holder_id
     WHERE h.id = $id AND h.vessel_id = $vessel FOR UPDATE OF h`,
    { id: handoverId, vessel: vesselId },
  );
  if (!row || (row.channel !== 'card' && row.channel !== 'screen')) throw notFound();
  if (!may(actor.roles, handOverAction(row.audience))) throw forbidden();
  if (row.undone_at) return { handoverId, undoneAt: row.undone_at.toISOString() };
  if (now.getTime() - row.at.getTime() > UNDO_SECONDS * 1000 + GRACE_MS) {
    throw new AppError(
      'not_now',
      'It is too late to undo this. Mark the card returned, or the person ashore, instead.',
    );
  }
  const bind = { vessel: vesselId, passphrase: row.passphrase_id, holder: row.holder_id };
  await db.run(tx, 'UPDATE handovers SET undone_at = $now WHERE id = $id AND vessel_id = $vessel', {
    now,
    id: handoverId,
    vessel: vesselId,
  });
  await db.run(
    tx,
    `DELETE FROM holders WHERE vessel_id = $vessel AND passphrase_id = $passphrase AND holder_id = $holder
       AND NOT EXISTS (SELECT 1 FROM handovers h WHERE h.vessel_id = $vessel AND h.passphrase_id = $passphrase
         AND h.holder_id = $holder AND h.undone_at IS NULL)`,
    bind,
  );
  await db.run(
    tx,
    "UPDATE cards SET state = 'printed', handed_over_at = NULL WHERE id = $card::uuid AND vessel_id = $vessel AND state = 'handed_over'",
    { card: row.card_id, vessel: vesselId },
  );
  await appendLog(services, tx, [
    {
      vesselId,
      kind: 'handover.undone',
      at: now,
      networkId: row.network_id,
      passphraseId: row.passphrase_id,
      subject: { kind: row.holder_kind, id: row.holder_id, name: row.name },
      actor: { id: actor.personId, name: actor.name },
      body: { audience: row.audience, channel: row.channel, ...(row.serial ? { serial: row.serial } : {}) },
    },
  ]);
  return { handoverId, undoneAt: now.toISOString() };
}
