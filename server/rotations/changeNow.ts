import { randomUUID } from 'node:crypto';
import type { RotationState } from '../../shared/api/common.ts';
import type { ChangeReason, PlanReason, RotationView } from '../../shared/api/rotations.ts';
import { may, planAction } from '../../shared/rules/permissions.ts';
import { OPEN_STATES } from '../../shared/rules/rotation.ts';
import { requireFresh } from '../auth/requireFresh.ts';
import type { Tx } from '../db/connection.ts';
import { AppError, forbidden } from '../errors.ts';
import { appendLog } from '../handovers/appendLog.ts';
import type { Verb } from '../http/verb.ts';
import type { Services } from '../services.ts';
import { byActor } from './by.ts';
import { crossingUntil, handOutToBoat } from './handOut.ts';
import { lockNetwork, lockRotation } from './lockRotation.ts';
import { viewRotation } from './present.ts';
import { stageAll } from './stage.ts';
import { takeStep } from './takeStep.ts';

/**
 * Changes a network's passphrase now: what was planned is brought forward, a new passphrase is staged at once,
 * and the boat gets it, or waits for somebody to open the entry sheet. Refused while a change is under way,
 * and on a network with equipment while a crossing is on. Urgent: the person answers, with a fresh proof of
 * identity, for not waiting until two ways aboard are confirmed.
 */
export async function changeNow(
  context: Verb,
  networkId: string,
  wanted: { readonly reason: ChangeReason; readonly urgent: boolean },
): Promise<RotationView> {
  const { services, tx, actor, now } = context;
  const vesselId = actor.vesselId ?? '';
  const network = await lockNetwork(services, tx, vesselId, networkId);
  if (!may(actor.roles, planAction(network.audience))) throw forbidden();
  if (wanted.urgent) requireFresh(context);
  if (network.carriesEquipment && (await crossingUntil(services, tx, vesselId, now))) throw crossingIsOn();
  await requireAccessPoints(services, tx, vesselId);

  const reasons: PlanReason[] = [{ code: 'person', why: wanted.reason }];
  const rotationId = await bringForward(context, networkId, network, {
    dueAt: now,
    reasons,
    mode: wanted.urgent ? 'urgent' : 'graceful',
  });
  const known = await lockRotation(services, tx, vesselId, rotationId);
  if (known.rotation.state === 'planned') await stageAll(services, tx, [rotationId], byActor(context));
  let staged = await lockRotation(services, tx, vesselId, rotationId);
  if (wanted.urgent) {
    staged = await takeStep(services, tx, staged, { kind: 'waive', by: actor.personId }, byActor(context));
  }
  if (staged.rotation.driver !== 'by_hand') await handOutToBoat(services, tx, staged, byActor(context));
  return viewRotation(services, tx, actor, rotationId, now);
}

/** Plans a network's change for an instant a person chose. */
export async function planFor(
  context: Verb,
  networkId: string,
  wanted: { readonly dueAt: Date; readonly reason: ChangeReason },
): Promise<RotationView> {
  const { services, tx, actor, now } = context;
  const vesselId = actor.vesselId ?? '';
  const network = await lockNetwork(services, tx, vesselId, networkId);
  if (!may(actor.roles, planAction(network.audience))) throw forbidden();
  if (wanted.dueAt.getTime() <= now.getTime()) {
    throw new AppError('invalid', 'Choose a time that is still to come, or change it now.', {
      errors: { dueAt: ['Choose a time that is still to come, or change it now.'] },
    });
  }
  if (network.carriesEquipment && (await crossingUntil(services, tx, vesselId, wanted.dueAt)))
    throw crossingIsOn();
  await requireAccessPoints(services, tx, vesselId);
  const rotationId = await bringForward(context, networkId, network, {
    dueAt: wanted.dueAt,
    reasons: [{ code: 'person', why: wanted.reason }],
    mode: 'graceful',
  });
  return viewRotation(services, tx, actor, rotationId, now);
}

export const crossingIsOn = () =>
  new AppError(
    'not_now',
    'This network carries equipment and a crossing is on at that time, so its passphrase is not changed then. Plan it for when you are in port.',
  );

async function requireAccessPoints(services: Services, tx: Tx, vesselId: string): Promise<void> {
  const any = await services.db.row(
    tx,
    'SELECT 1 FROM access_points WHERE vessel_id = $vessel AND removed_at IS NULL LIMIT 1',
    { vessel: vesselId },
  );
  if (!any) {
    throw new AppError(
      'not_now',
      'List the access points in the settings first, so that it can be checked that all of them have the new passphrase.',
    );
  }
}

interface Forward {
  readonly dueAt: Date;
  readonly reasons: readonly PlanReason[];
  readonly mode: 'graceful' | 'urgent';
}

/** The network's planned or staged change at its new time, or a new planned one. Refused when one is under way. */
async function bringForward(
  { services, tx, actor, now }: Verb,
  networkId: string,
  network: { driver: 'by_hand' | 'rehearsal'; epoch: number },
  { dueAt, reasons, mode }: Forward,
): Promise<string> {
  const { db } = services;
  const vesselId = actor.vesselId ?? '';
  const bind = {
    network: networkId,
    vessel: vesselId,
    due: dueAt,
    reasons: JSON.stringify(reasons),
    mode,
    now,
  };
  const open = await db.row<{ id: string; state: RotationState; takes_over: boolean }>(
    tx,
    'SELECT id, state, takes_over FROM rotations WHERE network_id = $network AND vessel_id = $vessel AND state = ANY($open) FOR UPDATE',
    { network: networkId, vessel: vesselId, open: [...OPEN_STATES] },
  );
  if (open && (open.takes_over || (open.state !== 'planned' && open.state !== 'staged'))) {
    throw new AppError(
      'conflict',
      "This network's change is under way already. Finish it, or give it up, before starting another.",
      { errors: { rotation: [open.id] } },
    );
  }
  const id = open?.id ?? randomUUID();
  if (open) {
    await db.run(
      tx,
      `UPDATE rotations SET due_at = $due, reasons = $reasons, mode = $mode, planned_by = 'person',
         planned_by_person = $person, occurrence = NULL, updated_at = $now WHERE id = $id`,
      { id, due: dueAt, reasons: bind.reasons, mode, person: actor.personId, now },
    );
  } else {
    await db.run(
      tx,
      `INSERT INTO rotations(id, vessel_id, network_id, state, mode, driver, epoch, planned_by, planned_by_person, reasons,
         due_at, deadline_at, created_at, updated_at)
       VALUES ($id, $vessel, $network, 'planned', $mode, $driver, $epoch, 'person', $person, $reasons, $due, NULL, $now, $now)`,
      { ...bind, id, driver: network.driver, epoch: network.epoch, person: actor.personId },
    );
  }
  await appendLog(services, tx, [
    {
      vesselId,
      kind: 'rotation.planned',
      at: now,
      networkId,
      subject: { kind: 'rotation', id },
      actor: { id: actor.personId, name: actor.name },
      body: { dueAt: dueAt.toISOString(), why: 'person', mode },
    },
  ]);
  return id;
}
