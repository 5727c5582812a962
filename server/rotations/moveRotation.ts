import type { RotationView } from '../../shared/api/rotations.ts';
import { may, planAction } from '../../shared/rules/permissions.ts';
import { forbidden } from '../errors.ts';
import { appendLog } from '../handovers/appendLog.ts';
import type { Verb } from '../http/verb.ts';
import { byActor } from './by.ts';
import { crossingIsOn } from './changeNow.ts';
import { crossingUntil } from './handOut.ts';
import { lockRotation } from './lockRotation.ts';
import { viewRotation } from './present.ts';
import { rotationEvent, takeStep } from './takeStep.ts';

/** Moves a planned or staged change to another instant that a person chose. */
export async function moveRotation(context: Verb, rotationId: string, dueAt: Date): Promise<RotationView> {
  const { services, tx, actor, now } = context;
  const known = await lockRotation(services, tx, actor.vesselId ?? '', rotationId);
  if (!may(actor.roles, planAction(known.audience))) throw forbidden();
  if (known.carriesEquipment && (await crossingUntil(services, tx, known.vesselId, dueAt)))
    throw crossingIsOn();
  const moved = await takeStep(services, tx, known, { kind: 'move', dueAt }, byActor(context));
  await services.db.run(
    tx,
    `UPDATE rotations SET planned_by = 'person', planned_by_person = $person, occurrence = NULL WHERE id = $id`,
    { id: known.id, person: actor.personId },
  );
  await appendLog(services, tx, [
    rotationEvent(moved, 'rotation.planned', byActor(context), {
      dueAt: dueAt.toISOString(),
      movedFrom: known.rotation.dueAt.toISOString(),
      why: 'person',
    }),
  ]);
  return viewRotation(services, tx, actor, known.id, now);
}
