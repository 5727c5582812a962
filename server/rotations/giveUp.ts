import { randomUUID } from 'node:crypto';
import type { RotationView } from '../../shared/api/rotations.ts';
import { may, planAction } from '../../shared/rules/permissions.ts';
import { goingBack, type Rotation, type Ticket } from '../../shared/rules/rotation.ts';
import type { Tx } from '../db/connection.ts';
import { AppError, forbidden } from '../errors.ts';
import { appendLog } from '../handovers/appendLog.ts';
import type { Verb } from '../http/verb.ts';
import type { Services } from '../services.ts';
import { byActor } from './by.ts';
import { dropStaged } from './cancelRotation.ts';
import { handOutToBoat } from './handOut.ts';
import { type KnownRotation, lockRotation } from './lockRotation.ts';
import { viewRotation } from './present.ts';
import { replanNetwork } from './replan.ts';
import { rotationEvent, takeStep } from './takeStep.ts';

/**
 * Gives up a change under way. Once it may have left the server the only way back is a new, higher ticket whose
 * target is the old passphrase, and which is verified on every access point like any other. A change that
 * waits for somebody who never opened its sheet has not left, so its passphrase is dropped and the plan goes on.
 */
export async function giveUp(context: Verb, rotationId: string): Promise<RotationView> {
  const { services, tx, actor, now } = context;
  const by = byActor(context);
  const known = await lockRotation(services, tx, actor.vesselId ?? '', rotationId);
  if (!may(actor.roles, planAction(known.audience)) && !may(actor.roles, 'rotation.enter')) throw forbidden();
  const { rotation } = known;
  if (rotation.handedOutAt === null) {
    const closed = await takeStep(services, tx, known, { kind: 'supersede', by: null }, by);
    await dropStaged(services, tx, closed, by);
    const next = await replanNetwork(services, tx, known.networkId, now);
    return viewRotation(services, tx, actor, next?.rotationId ?? known.id, now);
  }
  if (rotation.from === null) {
    throw new AppError(
      'not_now',
      'This is the first passphrase of the network, so there is none to go back to.',
    );
  }
  const ticket = await nextTicket(services, tx, known);
  await takeStep(services, tx, known, { kind: 'supersede', by: ticket }, by);
  const accessPoints = await services.db.rows<{ id: string }>(
    tx,
    'SELECT id FROM access_points WHERE vessel_id = $vessel AND removed_at IS NULL ORDER BY position, name, id',
    { vessel: known.vesselId },
  );
  const back = goingBack(
    rotation,
    ticket,
    accessPoints.map(({ id }) => id),
    now,
  );
  const id = randomUUID();
  await insertBack(services, tx, known, id, back, context);
  const staged = await lockRotation(services, tx, known.vesselId, id);
  if (rotation.waivedBy !== null) {
    await takeStep(services, tx, staged, { kind: 'waive', by: rotation.waivedBy }, by);
  }
  if (back.driver !== 'by_hand') {
    await handOutToBoat(services, tx, await lockRotation(services, tx, known.vesselId, id), by);
  }
  return viewRotation(services, tx, actor, id, now);
}

/** Counts the network's tickets up, under the lock on its row. */
async function nextTicket(services: Services, tx: Tx, known: KnownRotation): Promise<Ticket> {
  const [row] = await services.db.run<{ last_ticket: string; epoch: number }>(
    tx,
    `UPDATE networks n SET last_ticket = last_ticket + 1 FROM vessels v
     WHERE n.id = $network AND v.id = n.vessel_id RETURNING n.last_ticket, v.epoch`,
    { network: known.networkId },
  );
  if (!row) throw new AppError('not_found', 'There is no such network.');
  return { epoch: row.epoch, number: Number(row.last_ticket) };
}

async function insertBack(
  services: Services,
  tx: Tx,
  known: KnownRotation,
  id: string,
  back: Rotation,
  { actor, now }: Verb,
): Promise<void> {
  const { db } = services;
  await db.run(
    tx,
    `INSERT INTO rotations(id, vessel_id, network_id, state, mode, driver, epoch, ticket, from_passphrase_id, to_passphrase_id,
       planned_by, planned_by_person, reasons, due_at, takes_over, deadline_at, staged_at, created_at, updated_at)
     VALUES ($id, $vessel, $network, $state, $mode, $driver, $epoch, $ticket, $from, $to, 'person', $person, $reasons,
       $due, true, $deadline, $now, $now, $now)`,
    {
      id,
      vessel: known.vesselId,
      network: known.networkId,
      state: back.state,
      mode: back.mode,
      driver: back.driver,
      epoch: back.ticket?.epoch ?? 0,
      ticket: back.ticket?.number ?? 0,
      from: back.from,
      to: back.to,
      person: actor.personId,
      reasons: JSON.stringify([{ code: 'going_back', ticket: known.rotation.ticket?.number ?? 0 }]),
      due: back.dueAt,
      deadline: known.deadlineAt,
      now,
    },
  );
  await db.run(
    tx,
    `INSERT INTO rotation_targets(rotation_id, access_point_id, vessel_id)
     SELECT $id::uuid, a, $vessel::uuid FROM unnest($accessPoints::uuid[]) AS a`,
    { id, vessel: known.vesselId, accessPoints: back.targets.map((target) => target.accessPointId) },
  );
  await appendLog(services, tx, [
    rotationEvent(
      { ...known, id, rotation: back },
      'rotation.staged',
      { now, actor: { id: actor.personId, name: actor.name } },
      {
        goingBack: true,
        gaveUp: known.rotation.ticket?.number ?? 0,
      },
    ),
  ]);
}
