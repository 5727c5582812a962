import type { RotationView } from '../../shared/api/rotations.ts';
import { AppError, notFound } from '../errors.ts';
import { appendLog } from '../handovers/appendLog.ts';
import type { Verb } from '../http/verb.ts';
import { refuseInNote } from '../passphrases/refuseInNote.ts';
import { byActor } from './by.ts';
import { requireTypedBack } from './confirmAccessPoint.ts';
import { handOutToBoat } from './handOut.ts';
import { type KnownRotation, lockRotation } from './lockRotation.ts';
import { observe, personReporter } from './observe.ts';
import { viewRotation } from './present.ts';
import { rotationEvent, takeStep } from './takeStep.ts';

/** Somebody aboard cannot reach an access point: the change waits for somebody, and the screens say where. */
export async function reportUnreachable(
  context: Verb,
  rotationId: string,
  accessPointId: string,
  note: string | undefined,
): Promise<RotationView> {
  const { services, tx, actor, now } = context;
  const by = byActor(context);
  const known = await lockRotation(services, tx, actor.vesselId ?? '', rotationId);
  const name = await targetName(context, known, accessPointId);
  await refuseInNote(services, tx, known.networkId, note);
  const { ticket } = known.rotation;
  if (ticket === null) throw new AppError('not_now', 'This change has not started yet.');
  const reporter = await personReporter(services, tx, known, actor.personId);
  const seen = { accessPointId, seen: 'unreachable', evidence: 'E2' } as const;
  const after = await observe(services, tx, known, ticket, seen, reporter, by);
  const why = `${name} could not be reached${note ? `: ${note.replace(/[.\s]+$/, '')}` : ''}. Enter the new passphrase there as soon as it can be, then confirm it.`;
  await takeStep(services, tx, after, { kind: 'needSomebody', why }, by);
  return viewRotation(services, tx, actor, rotationId, now);
}

/** An access point was found on something else than the passphrase in force. Nothing is overwritten silently. */
export async function reportDrift(
  context: Verb,
  rotationId: string,
  accessPointId: string,
  seen: 'old' | 'other',
): Promise<RotationView> {
  const { services, tx, actor, now } = context;
  const by = byActor(context);
  const known = await lockRotation(services, tx, actor.vesselId ?? '', rotationId);
  await targetName(context, known, accessPointId);
  const drifted = await takeStep(services, tx, known, { kind: 'drift', accessPointId, seen }, by);
  await appendLog(services, tx, [
    {
      ...rotationEvent(drifted, 'rotation.access_point', by, { seen }),
      subject: { kind: 'access_point', id: accessPointId },
    },
  ]);
  return viewRotation(services, tx, actor, rotationId, now);
}

/** The access point runs the passphrase in force again, proven by typing it back. */
export async function acceptDrift(
  context: Verb,
  rotationId: string,
  accessPointId: string,
  typed: string,
): Promise<RotationView> {
  const { services, tx, actor, now } = context;
  const by = byActor(context);
  const known = await lockRotation(services, tx, actor.vesselId ?? '', rotationId);
  await targetName(context, known, accessPointId);
  const { to, state } = known.rotation;
  if (to === null || state !== 'drifted') {
    throw new AppError('not_now', 'No access point of this network runs something else.');
  }
  await requireTypedBack(context, to, typed);
  const after = await takeStep(
    services,
    tx,
    known,
    { kind: 'acceptDrift', accessPointId, evidence: 'E2' },
    by,
  );
  await appendLog(services, tx, [
    {
      ...rotationEvent(after, 'rotation.access_point', by, { seen: 'new', evidence: 'E2' }),
      subject: { kind: 'access_point', id: accessPointId },
    },
  ]);
  return viewRotation(services, tx, actor, rotationId, now);
}

/** Lets the boat go on with the same ticket and the same passphrase. */
export async function goOn(context: Verb, rotationId: string): Promise<RotationView> {
  const { services, tx, actor, now } = context;
  const known = await lockRotation(services, tx, actor.vesselId ?? '', rotationId);
  if (known.rotation.driver === 'by_hand') {
    throw new AppError('not_now', 'This change is entered by hand. Open the entry sheet instead.');
  }
  await handOutToBoat(services, tx, known, byActor(context));
  return viewRotation(services, tx, actor, rotationId, now);
}

async function targetName(
  { services, tx }: Verb,
  known: KnownRotation,
  accessPointId: string,
): Promise<string> {
  const row = await services.db.row<{ name: string }>(
    tx,
    `SELECT a.name FROM rotation_targets t JOIN access_points a ON a.id = t.access_point_id
     WHERE t.rotation_id = $rotation AND t.access_point_id = $accessPoint AND t.vessel_id = $vessel`,
    { rotation: known.id, accessPoint: accessPointId, vessel: known.vesselId },
  );
  if (!row) throw notFound();
  return row.name;
}
