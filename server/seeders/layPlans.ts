import { randomUUID } from 'node:crypto';
import type { Audience } from '../../shared/rules/permissions.ts';
import { type PlanInput, planNext } from '../../shared/rules/planning.ts';
import type { LaidVessel, Laying } from './laying.ts';

/** What a vessel's plan looks at besides its networks. */
export interface Aboard {
  readonly voyages: PlanInput['voyages'];
  readonly parties: PlanInput['parties'];
  readonly exposures: Partial<Record<Audience, PlanInput['exposures']>>;
}

/** The next change of each network by the plan's own rule, except of those that have one already. */
export function layPlans(
  laying: Laying,
  vessel: LaidVessel,
  aboard: Aboard,
  except: readonly Audience[],
): void {
  const { rows, log, now } = laying;
  for (const network of vessel.networks) {
    if (except.includes(network.audience)) continue;
    const plan = planNext({
      network: { audience: network.audience, carriesEquipment: false },
      policy: {
        ageLimitDays: network.limitDays,
        quietHours: network.quietHours,
        onPartyDeparture: network.movesUp && network.audience === 'guest',
        onSignOff: network.movesUp && network.audience === 'crew',
        onLostCard: network.movesUp,
        onLeak: network.movesUp,
      },
      liveAt: network.liveAt,
      zones: vessel.calendar.zones,
      voyages: aboard.voyages,
      parties: aboard.parties,
      exposures: aboard.exposures[network.audience] ?? [],
      used: new Set(),
      now,
    });
    const id = randomUUID();
    rows.add('rotations', {
      id,
      vessel_id: vessel.id,
      network_id: network.id,
      state: 'planned',
      mode: 'graceful',
      driver: vessel.plan.driver,
      epoch: 1,
      planned_by: 'plan',
      reasons: plan.reasons,
      due_at: plan.dueAt,
      deadline_at: plan.deadlineAt,
      occurrence: plan.occurrence,
      created_at: now,
      updated_at: now,
    });
    log.push({
      vesselId: vessel.id,
      kind: 'rotation.planned',
      at: now,
      networkId: network.id,
      subject: { kind: 'rotation', id },
      body: { dueAt: plan.dueAt.toISOString(), why: plan.reasons[0]?.code ?? 'age_limit' },
    });
  }
}
