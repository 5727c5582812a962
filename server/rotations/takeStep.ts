import type { RotationState } from '../../shared/api/common.ts';
import type { LogKind } from '../../shared/rules/logKinds.ts';
import type { Action, Rotation } from '../../shared/rules/rotation.ts';
import { step } from '../../shared/rules/rotationStep.ts';
import type { Tx } from '../db/connection.ts';
import { AppError } from '../errors.ts';
import { appendLog, type LogEvent } from '../handovers/appendLog.ts';
import type { Services } from '../services.ts';
import type { By } from './by.ts';
import { comeIntoForce } from './comeIntoForce.ts';
import type { KnownRotation } from './lockRotation.ts';

const LOG_OF: Partial<Record<RotationState, LogKind>> = {
  staged: 'rotation.staged',
  handed_out: 'rotation.handed_out',
  applying: 'rotation.applying',
  unknown: 'rotation.unknown',
  needs_somebody: 'rotation.needs_somebody',
  reconciling: 'rotation.reconciling',
  live: 'rotation.live',
  drifted: 'rotation.drifted',
  cancelled: 'rotation.cancelled',
  superseded: 'rotation.superseded',
};

/** The column that remembers when a state was entered. */
const STAMP_OF: Partial<Record<RotationState, string>> = {
  staged: 'staged_at',
  applying: 'applying_at',
  live: 'live_at',
  retired: 'ended_at',
  cancelled: 'ended_at',
  superseded: 'ended_at',
};

/**
 * Takes one step of a locked rotation: asks the rules, stores each state entered (the database checks the same
 * steps again) and writes the log lines, all in the caller's transaction. Throws the rules' own sentence when
 * they refuse: `conflict` for what is over or open already and for stale reports, `not_now` otherwise.
 */
export async function takeStep(
  services: Services,
  tx: Tx,
  known: KnownRotation,
  action: Action,
  by: By,
): Promise<KnownRotation> {
  const outcome = step(known.rotation, action, by.now);
  if (!outcome.ok) throw new AppError(outcome.code === 'not_now' ? 'not_now' : 'conflict', outcome.sentence);
  await store(services, tx, known, outcome.next, outcome.through, by);
  const after = { ...known, rotation: outcome.next };
  await appendLog(services, tx, eventsOf(after, outcome.through, by));
  if (outcome.through.includes('live') && known.rotation.state !== 'drifted') {
    await comeIntoForce(services, tx, after, by);
  }
  return after;
}

async function store(
  services: Services,
  tx: Tx,
  known: KnownRotation,
  next: Rotation,
  through: readonly RotationState[],
  { now }: By,
): Promise<void> {
  const { db } = services;
  const before = known.rotation;
  for (const way of next.ways.filter((one) => !before.ways.includes(one))) {
    await db.run(
      tx,
      'INSERT INTO rotation_ways(rotation_id, vessel_id, way, at) VALUES ($id, $vessel, $way, $now) ON CONFLICT DO NOTHING',
      { id: known.id, vessel: known.vesselId, way, now },
    );
  }
  for (const target of next.targets) {
    const was = before.targets.find((one) => one.accessPointId === target.accessPointId);
    if (was === undefined || was === target) continue;
    await db.run(
      tx,
      `UPDATE rotation_targets SET seen = $seen, evidence = $evidence, seen_at = $now
       WHERE rotation_id = $id AND access_point_id = $accessPoint`,
      { id: known.id, accessPoint: target.accessPointId, seen: target.seen, evidence: target.evidence, now },
    );
  }
  // One update a state, so that the database sees and checks every step.
  for (const state of through.slice(0, -1)) {
    await db.run(tx, `UPDATE rotations SET state = $state${stamp(state)}, updated_at = $now WHERE id = $id`, {
      id: known.id,
      state,
      now,
    });
  }
  const last = through.at(-1) ?? next.state;
  if (last === 'live') await retireEarlier(services, tx, known, now);
  await db.run(
    tx,
    `UPDATE rotations SET state = $state${through.length > 0 ? stamp(last) : ''}, due_at = $due, handed_out_at = $handedOut,
       report_by = $reportBy, detail = $detail, waived_by = $waivedBy, updated_at = $now WHERE id = $id`,
    {
      id: known.id,
      state: next.state,
      due: next.dueAt,
      handedOut: next.handedOutAt,
      reportBy: next.reportBy,
      detail: next.detail,
      waivedBy: next.waivedBy,
      now,
    },
  );
}

function stamp(state: RotationState): string {
  const column = STAMP_OF[state];
  return column ? `, ${column} = $now` : '';
}

/** The change in force until now gives way first: a network has one in force at any time. */
async function retireEarlier(services: Services, tx: Tx, known: KnownRotation, now: Date): Promise<void> {
  await services.db.run(
    tx,
    `UPDATE rotations SET state = 'retired', ended_at = $now, updated_at = $now
     WHERE network_id = $network AND state IN ('live','drifted') AND id <> $id`,
    { network: known.networkId, id: known.id, now },
  );
}

function eventsOf(known: KnownRotation, through: readonly RotationState[], by: By): LogEvent[] {
  return through.flatMap((state) => {
    const kind = LOG_OF[state];
    return kind ? [rotationEvent(known, kind, by)] : [];
  });
}

/** A log line about a rotation; figures only. */
export function rotationEvent(
  known: KnownRotation,
  kind: LogKind,
  { now, actor }: By,
  body: LogEvent['body'] = {},
): LogEvent {
  const { ticket, to, driver, mode } = known.rotation;
  return {
    vesselId: known.vesselId,
    kind,
    at: now,
    networkId: known.networkId,
    passphraseId: to,
    subject: { kind: 'rotation', id: known.id },
    actor,
    body: { driver, mode, ...(ticket ? { epoch: ticket.epoch, ticket: ticket.number } : {}), ...body },
  };
}
