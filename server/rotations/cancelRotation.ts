import type { RotationView } from '../../shared/api/rotations.ts';
import { may, planAction } from '../../shared/rules/permissions.ts';
import type { Tx } from '../db/connection.ts';
import { forbidden } from '../errors.ts';
import { appendLog } from '../handovers/appendLog.ts';
import type { Verb } from '../http/verb.ts';
import type { Services } from '../services.ts';
import type { By } from './by.ts';
import { byActor } from './by.ts';
import { voidCards } from './comeIntoForce.ts';
import { type KnownRotation, lockRotation } from './lockRotation.ts';
import { viewRotation } from './present.ts';
import { replanNetwork } from './replan.ts';
import { takeStep } from './takeStep.ts';

/** Cancels a change that has not left yet; a passphrase staged for it is never used. The plan sets the next. */
export async function cancelRotation(
  context: Verb,
  rotationId: string,
): Promise<{ cancelled: RotationView; next: RotationView | null }> {
  const { services, tx, actor, now } = context;
  const known = await lockRotation(services, tx, actor.vesselId ?? '', rotationId);
  if (!may(actor.roles, planAction(known.audience))) throw forbidden();
  const by = byActor(context);
  const cancelled = await takeStep(services, tx, known, { kind: 'cancel' }, by);
  await dropStaged(services, tx, cancelled, by);
  const next = await replanNetwork(services, tx, known.networkId, now);
  return {
    cancelled: await viewRotation(services, tx, actor, known.id, now),
    next: next ? await viewRotation(services, tx, actor, next.rotationId, now) : null,
  };
}

/** A staged passphrase that never left the server: retired unused, and the cards printed with it void. */
export async function dropStaged(services: Services, tx: Tx, known: KnownRotation, by: By): Promise<void> {
  const { to } = known.rotation;
  if (to === null) return;
  const dropped = await services.db.run(
    tx,
    'UPDATE passphrases SET retired_at = $now WHERE id = $id AND live_at IS NULL AND retired_at IS NULL RETURNING id',
    { id: to, now: by.now },
  );
  if (dropped.length === 0) return;
  const cards = await voidCards(services, tx, [to], by.now);
  await appendLog(services, tx, [
    {
      vesselId: known.vesselId,
      kind: 'passphrase.retired',
      at: by.now,
      networkId: known.networkId,
      passphraseId: to,
      subject: { kind: 'rotation', id: known.id },
      actor: by.actor,
      body: { used: false },
    },
    ...cards.map((card) => ({
      vesselId: known.vesselId,
      kind: 'card.void' as const,
      at: by.now,
      networkId: known.networkId,
      passphraseId: to,
      subject: { kind: 'card' as const, id: card.id },
      actor: by.actor,
      body: { serial: card.serial },
    })),
  ]);
}
