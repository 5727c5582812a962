import type { RotationState } from '../api/common.ts';
import {
  type Action,
  isDisclosed,
  isUnderWay,
  isVerified,
  type Observation,
  OPEN_STATES,
  type Outcome,
  ROTATION_STEPS,
  type Rotation,
  type Target,
  type Ticket,
  verifiedEverywhere,
} from './rotation.ts';

/** Takes one step, or says in a sentence why not. Nothing here reads a clock or makes a passphrase. */
export function step(rotation: Rotation, action: Action, now: Date): Outcome {
  switch (action.kind) {
    case 'stage':
      return stage(rotation, action);
    case 'move':
      return move(rotation, action.dueAt, now);
    case 'cancel':
      return isEarly(rotation)
        ? enter(rotation, {}, 'cancelled')
        : refuse(
            'not_now',
            'This change has left for the boat, so it cannot be cancelled. Give it up instead: a new change then goes back to the old passphrase.',
          );
    case 'disclose':
      if (rotation.to === null || !isOpen(rotation)) return over();
      if (rotation.ways.includes(action.way)) return enter(rotation, {});
      return enter(rotation, { ways: [...rotation.ways, action.way] });
    case 'waive':
      if (rotation.mode !== 'urgent' || !isOpen(rotation))
        return refuse(
          'not_now',
          'Only an urgent change may start without two ways aboard to learn the passphrase.',
        );
      return enter(rotation, { waivedBy: action.by });
    case 'handOut':
      return handOut(rotation, action, now);
    case 'begin':
      return begin(rotation);
    case 'observe':
      return observe(rotation, action);
    case 'reportMissing':
      return reportMissing(rotation, now);
    case 'needSomebody':
      return needSomebody(rotation, action.why);
    case 'supersede':
      return supersede(rotation, action.by);
    case 'retire':
      return rotation.state === 'live' || rotation.state === 'drifted' || rotation.state === 'reconciling'
        ? enter(rotation, {}, 'retired')
        : refuse('not_now', 'Only a passphrase in force can be retired.');
    case 'drift':
      return drift(rotation, action);
    case 'acceptDrift':
      return acceptDrift(rotation, action);
    case 'restore':
      return restore(rotation);
  }
}

/** Nothing of it is aboard yet: not planned or staged to go back from one that was. */
const isEarly = (rotation: Rotation): boolean =>
  (rotation.state === 'planned' || rotation.state === 'staged') && !rotation.takesOver;

const isOpen = (rotation: Rotation): boolean =>
  (OPEN_STATES as readonly RotationState[]).includes(rotation.state);

function refuse(code: 'not_now' | 'stale' | 'conflict', sentence: string): Outcome {
  return { ok: false, code, sentence };
}

const over = (): Outcome => refuse('conflict', 'This change is over. Reload to see what is in force.');

/** Enters each state in turn by a listed step; a step that is not listed is a fault in the rules above. */
function enter(rotation: Rotation, facts: Partial<Rotation>, ...through: readonly RotationState[]): Outcome {
  let state = rotation.state;
  for (const next of through) {
    if (!ROTATION_STEPS[state].includes(next)) {
      return refuse(
        'conflict',
        `A change cannot go from ${state.replace('_', ' ')} to ${next.replace('_', ' ')}.`,
      );
    }
    state = next;
  }
  return { ok: true, next: { ...rotation, ...facts, state }, through };
}

function stage(rotation: Rotation, action: Extract<Action, { kind: 'stage' }>): Outcome {
  if (rotation.state !== 'planned' || rotation.to !== null) {
    return refuse('conflict', 'This change has its passphrase already, and keeps it.');
  }
  if (action.targets.length === 0) {
    return refuse(
      'not_now',
      'List the access points first, so that it can be checked that all of them have the new passphrase.',
    );
  }
  const targets = action.targets.map(
    (accessPointId): Target => ({ accessPointId, seen: null, evidence: null }),
  );
  return enter(rotation, { ticket: action.ticket, to: action.to, targets }, 'staged');
}

function move(rotation: Rotation, dueAt: Date, now: Date): Outcome {
  if (!isEarly(rotation)) {
    return refuse('not_now', 'This change is under way already and cannot be moved.');
  }
  if (dueAt.getTime() < now.getTime()) return refuse('not_now', 'Choose a time that is still to come.');
  return enter(rotation, { dueAt });
}

function handOut(rotation: Rotation, action: Extract<Action, { kind: 'handOut' }>, now: Date): Outcome {
  if (!['staged', 'unknown', 'needs_somebody', 'reconciling'].includes(rotation.state)) {
    return rotation.state === 'handed_out' || rotation.state === 'applying'
      ? refuse('conflict', 'This change is under way already.')
      : over();
  }
  // Once the boat has it, sending the same again during a crossing changes nothing aboard.
  if (action.crossing && rotation.handedOutAt === null) {
    return refuse(
      'not_now',
      'This network carries equipment and a crossing is on, so its passphrase is not changed now. Plan it for when you are in port.',
    );
  }
  return enter(
    rotation,
    { handedOutAt: rotation.handedOutAt ?? now, reportBy: action.reportBy, detail: null },
    'handed_out',
  );
}

function begin(rotation: Rotation): Outcome {
  if (rotation.state === 'applying') return enter(rotation, {});
  if (
    !['handed_out', 'unknown', 'needs_somebody'].includes(rotation.state) ||
    rotation.handedOutAt === null
  ) {
    return refuse('conflict', 'This change is not ready to start.');
  }
  const waived = rotation.mode === 'urgent' && rotation.waivedBy !== null;
  if (!waived && !isDisclosed(rotation)) {
    return refuse(
      'not_now',
      'Two ways aboard to learn the new passphrase must be confirmed first, so that nobody is locked out.',
    );
  }
  return enter(rotation, {}, 'applying');
}

function observe(rotation: Rotation, action: Extract<Action, { kind: 'observe' }>): Outcome {
  const { ticket } = rotation;
  if (ticket === null || ticket.epoch !== action.ticket.epoch || ticket.number !== action.ticket.number) {
    return refuse('stale', 'This report is about another change and was put aside.');
  }
  if (
    !['handed_out', 'applying', 'unknown', 'needs_somebody'].includes(rotation.state) ||
    !rotation.handedOutAt
  ) {
    return refuse('stale', 'This change is not under way, so the report was put aside.');
  }
  const known = rotation.targets.find((target) => target.accessPointId === action.accessPointId);
  if (!known) return refuse('stale', 'That access point does not belong to this change.');
  // Having sent it again says less than having read it back.
  const weaker = action.seen === 'new' && action.evidence === 'E0' && isVerified(known);
  const targets = weaker ? rotation.targets : withSeen(rotation.targets, action);
  if (verifiedEverywhere(targets)) {
    const facts = { targets, detail: null, reportBy: null };
    return rotation.state === 'handed_out'
      ? enter(rotation, facts, 'applying', 'live')
      : enter(rotation, facts, 'live');
  }
  const somebody = targets.find((target) => target.seen === 'unreachable' || target.seen === 'other');
  if (somebody) {
    const facts = { targets, detail: rotation.detail ?? NEEDS_LOOKING_AT };
    return rotation.state === 'needs_somebody'
      ? enter(rotation, facts)
      : enter(rotation, facts, 'needs_somebody');
  }
  const facts = { targets, detail: null };
  return rotation.state === 'applying' ? enter(rotation, facts) : enter(rotation, facts, 'applying');
}

const NEEDS_LOOKING_AT =
  'An access point could not be reached or runs something else. Somebody has to look at it and enter the new passphrase there.';

function withSeen(
  targets: readonly Target[],
  { accessPointId, seen, evidence }: Observation,
): readonly Target[] {
  return targets.map((target) =>
    target.accessPointId === accessPointId ? { accessPointId, seen, evidence } : target,
  );
}

function reportMissing(rotation: Rotation, now: Date): Outcome {
  if (rotation.state !== 'handed_out' && rotation.state !== 'applying') {
    return refuse('conflict', 'No report is being waited for.');
  }
  if (rotation.reportBy === null || now.getTime() < rotation.reportBy.getTime()) {
    return refuse('not_now', 'The boat still has time to report.');
  }
  return enter(rotation, {}, 'unknown');
}

function needSomebody(rotation: Rotation, why: string): Outcome {
  if (rotation.state === 'needs_somebody') return enter(rotation, { detail: why });
  if (rotation.state === 'planned' || !isOpen(rotation)) return over();
  return enter(rotation, { detail: why }, 'needs_somebody');
}

function supersede(rotation: Rotation, by: Ticket | null): Outcome {
  if (!isUnderWay(rotation.state)) {
    return refuse(
      'not_now',
      'Only a change that is under way can be given up. This one can be cancelled or is over.',
    );
  }
  if (rotation.handedOutAt !== null) {
    const own = rotation.ticket;
    const higher =
      by !== null &&
      own !== null &&
      by.epoch >= own.epoch &&
      (by.epoch > own.epoch || by.number > own.number);
    if (!higher)
      return refuse(
        'conflict',
        'The boat may have this change already, so only a newer one can take over from it.',
      );
  }
  return enter(rotation, {}, 'superseded');
}

function drift(rotation: Rotation, action: Extract<Action, { kind: 'drift' }>): Outcome {
  if (rotation.state !== 'live' && rotation.state !== 'drifted') {
    return refuse('not_now', 'This passphrase is not in force, so nothing can have moved away from it.');
  }
  if (!rotation.targets.some((target) => target.accessPointId === action.accessPointId)) {
    return refuse('stale', 'That access point does not belong to this change.');
  }
  const targets = withSeen(rotation.targets, { ...action, evidence: 'E1' });
  return rotation.state === 'live' ? enter(rotation, { targets }, 'drifted') : enter(rotation, { targets });
}

function acceptDrift(rotation: Rotation, action: Extract<Action, { kind: 'acceptDrift' }>): Outcome {
  if (rotation.state !== 'drifted')
    return refuse('not_now', 'No access point of this network runs something else.');
  const targets = withSeen(rotation.targets, { ...action, seen: 'new' });
  return verifiedEverywhere(targets) ? enter(rotation, { targets }, 'live') : enter(rotation, { targets });
}

/** After a restore nothing is claimed until the boat was asked; what was only planned or staged stays so. */
function restore(rotation: Rotation): Outcome {
  if (rotation.state === 'live' || rotation.state === 'drifted' || isUnderWay(rotation.state)) {
    return rotation.state === 'reconciling' ? enter(rotation, {}) : enter(rotation, {}, 'reconciling');
  }
  return enter(rotation, {});
}
