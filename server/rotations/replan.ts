import { randomUUID } from 'node:crypto';
import type { RotationState } from '../../shared/api/common.ts';
import { exposedSince, type Plan, planNext } from '../../shared/rules/planning.ts';
import { OPEN_STATES } from '../../shared/rules/rotation.ts';
import type { Tx } from '../db/connection.ts';
import { appendLog } from '../handovers/appendLog.ts';
import type { Services } from '../services.ts';
import { type PlanFacts, planFacts } from './planFacts.ts';

/** What the plan says after a look at a network. */
export interface Replanned {
  readonly rotationId: string;
  readonly dueAt: Date;
  /** True when this call set or moved the change. */
  readonly changed: boolean;
}

interface OpenRow {
  id: string;
  state: RotationState;
  planned_by: 'plan' | 'person';
  due_at: Date;
  takes_over: boolean;
  /** When it was last planned or moved. */
  updated_at: Date;
}

/**
 * Looks at a network's plan again after something happened (a leak, a departure, a sign-off, a new policy or
 * calendar) and sets or moves its planned change inside the caller's transaction. Answers null when there is
 * nothing to plan: the network is removed, has no passphrase in force, or its change is already under way.
 * An exposure never moves a change later; a staged change and one a person chose the time of only ever move
 * earlier, and only for an exposure.
 */
export async function replanNetwork(
  services: Services,
  tx: Tx,
  networkId: string,
  now: Date,
): Promise<Replanned | null> {
  const { db } = services;
  await db.run(
    tx,
    'SELECT 1 FROM log_heads h JOIN networks n ON n.vessel_id = h.vessel_id WHERE n.id = $network FOR UPDATE OF h',
    { network: networkId },
  );
  await db.run(tx, 'SELECT 1 FROM networks WHERE id = $network FOR UPDATE', { network: networkId });
  const open = await db.row<OpenRow>(
    tx,
    `SELECT id, state, planned_by, due_at, takes_over, updated_at FROM rotations WHERE network_id = $network AND state = ANY($open) FOR UPDATE`,
    { network: networkId, open: [...OPEN_STATES] },
  );
  if (open && (open.takes_over || (open.state !== 'planned' && open.state !== 'staged'))) return null;
  const facts = await planFacts(services, tx, networkId, now);
  if (!facts) return null;
  const plan = planNext(facts.input);
  if (!open) return setPlan(services, tx, networkId, facts, plan, now);
  return adjust(services, tx, networkId, facts, open, plan, now);
}

async function setPlan(
  services: Services,
  tx: Tx,
  networkId: string,
  facts: PlanFacts,
  plan: Plan,
  now: Date,
): Promise<Replanned> {
  const rotationId = randomUUID();
  await services.db.run(
    tx,
    `INSERT INTO rotations(id, vessel_id, network_id, state, driver, epoch, planned_by, reasons, due_at, deadline_at,
       occurrence, created_at, updated_at)
     VALUES ($id, $vessel, $network, 'planned', $driver, $epoch, 'plan', $reasons, $due, $deadline, $occurrence, $now, $now)`,
    {
      id: rotationId,
      vessel: facts.vesselId,
      network: networkId,
      driver: facts.driver,
      epoch: facts.epoch,
      reasons: JSON.stringify(plan.reasons),
      due: plan.dueAt,
      deadline: plan.deadlineAt,
      occurrence: plan.occurrence,
      now,
    },
  );
  await logPlan(services, tx, networkId, facts.vesselId, rotationId, plan, now);
  return { rotationId, dueAt: plan.dueAt, changed: true };
}

async function adjust(
  services: Services,
  tx: Tx,
  networkId: string,
  facts: PlanFacts,
  open: OpenRow,
  plan: Plan,
  now: Date,
): Promise<Replanned> {
  // What somebody decided stands until something new exposes the network.
  const since = open.planned_by === 'person' ? open.updated_at : new Date(0);
  const exposed = exposedSince(facts.input, since);
  const earlier = plan.dueAt.getTime() < open.due_at.getTime();
  const held = open.state === 'staged' || open.planned_by === 'person';
  const passed = open.due_at.getTime() <= now.getTime();
  const moves = earlier ? exposed || !held : !held && !exposed && !passed;
  if (!moves || plan.dueAt.getTime() === open.due_at.getTime()) {
    // The same time, but perhaps another limit.
    await services.db.run(tx, 'UPDATE rotations SET deadline_at = $deadline WHERE id = $id', {
      id: open.id,
      deadline: plan.deadlineAt,
    });
    return { rotationId: open.id, dueAt: open.due_at, changed: false };
  }
  await services.db.run(
    tx,
    `UPDATE rotations SET due_at = $due, deadline_at = $deadline, reasons = $reasons, occurrence = $occurrence,
       planned_by = 'plan', updated_at = $now WHERE id = $id`,
    {
      id: open.id,
      due: plan.dueAt,
      deadline: plan.deadlineAt,
      reasons: JSON.stringify(plan.reasons),
      occurrence: plan.occurrence,
      now,
    },
  );
  await logPlan(services, tx, networkId, facts.vesselId, open.id, plan, now, open.due_at);
  return { rotationId: open.id, dueAt: plan.dueAt, changed: true };
}

async function logPlan(
  services: Services,
  tx: Tx,
  networkId: string,
  vesselId: string,
  rotationId: string,
  plan: Plan,
  now: Date,
  movedFrom?: Date,
): Promise<void> {
  await appendLog(services, tx, [
    {
      vesselId,
      kind: 'rotation.planned',
      at: now,
      networkId,
      subject: { kind: 'rotation', id: rotationId },
      body: {
        dueAt: plan.dueAt.toISOString(),
        why: plan.reasons[0]?.code ?? 'age_limit',
        ...(movedFrom ? { movedFrom: movedFrom.toISOString() } : {}),
      },
    },
  ]);
}
