import { z } from 'zod';
import { NOTE_MAX, PASSPHRASE_MAX, TYPED_MAX } from '../rules/limits.ts';
import {
  audience,
  driver,
  id,
  instant,
  networkParams,
  pageQuery,
  rotationState,
  security,
  vesselParams,
} from './common.ts';
import { contract, vessel } from './contract.ts';

const planners = vessel('rotation.plan.owner', 'rotation.plan.guest', 'rotation.plan.crew');
const entering = vessel('rotation.enter');
const viewing = vessel('networks.view');

const rotationParams = vesselParams.extend({ rotationId: id });
const accessPointParams = rotationParams.extend({ accessPointId: id });

/** What was typed back without seeing it. */
const typedBack = z.strictObject({
  typed: z.string().max(TYPED_MAX, `A passphrase has at most ${PASSPHRASE_MAX} characters`),
});

/** Why somebody changes a passphrase now. */
export const changeReason = z.enum(['routine', 'leak', 'departure', 'lost_card', 'dismissal']);
export type ChangeReason = z.infer<typeof changeReason>;

/** Why a change is planned when it is, with the figures of each reason. Instants in UTC. */
export const planReason = z.discriminatedUnion('code', [
  z.strictObject({ code: z.literal('age_limit'), days: z.number().int(), reachedAt: instant }),
  z.strictObject({ code: z.literal('party_departure'), at: instant }),
  z.strictObject({ code: z.literal('departed_guest'), at: instant }),
  z.strictObject({ code: z.literal('sign_off'), at: instant }),
  z.strictObject({ code: z.literal('lost_card'), at: instant }),
  z.strictObject({ code: z.literal('leak'), at: instant }),
  /** Put off past its limit because the owner is aboard. */
  z.strictObject({ code: z.literal('owner_aboard'), until: instant }),
  /** Put off because the network carries equipment and a crossing is on. */
  z.strictObject({ code: z.literal('crossing'), until: instant }),
  z.strictObject({ code: z.literal('overdue'), since: instant }),
  /** A person cancelled the occurrence before this one. */
  z.strictObject({ code: z.literal('put_off'), from: instant }),
  z.strictObject({ code: z.literal('person'), why: changeReason }),
  /** Goes back to the passphrase before, after a change was given up. */
  z.strictObject({ code: z.literal('going_back'), ticket: z.number().int() }),
]);
export type PlanReason = z.infer<typeof planReason>;

/** What was last seen on one access point under this change. */
export const accessPointOutcome = z.strictObject({
  id,
  name: z.string(),
  deck: z.string().nullable(),
  seen: z.enum(['new', 'old', 'other', 'unreachable']).nullable(),
  /** E0 sent, E1 read back, E2 a real association or a person's typed-back passphrase. */
  evidence: z.enum(['E0', 'E1', 'E2']).nullable(),
  seenAt: instant.nullable(),
});

const summaryShape = {
  id,
  networkId: id,
  ssid: z.string(),
  audience,
  state: rotationState,
  /** The state in people's words, e.g. "3 of 4 access points have the new passphrase." */
  sentence: z.string(),
  mode: z.enum(['graceful', 'urgent']),
  driver,
  plannedBy: z.enum(['plan', 'person']),
  reasons: z.array(planReason),
  dueAt: instant,
  deadlineAt: instant.nullable(),
  stagedAt: instant.nullable(),
  liveAt: instant.nullable(),
  endedAt: instant.nullable(),
  /** Access points verified on the new passphrase, of how many. */
  verified: z.number().int(),
  of: z.number().int(),
} as const;

export const rotationSummary = z.strictObject(summaryShape);
export type RotationSummary = z.infer<typeof rotationSummary>;

export const rotationView = z.strictObject({
  ...summaryShape,
  ticket: z.number().int().nullable(),
  handedOutAt: instant.nullable(),
  /** Without a report until then, the state is not yet known. */
  reportBy: instant.nullable(),
  /** What somebody has to do, as a sentence, when the change needs somebody. */
  detail: z.string().nullable(),
  waived: z.boolean(),
  /** Ways aboard to learn the new passphrase that are confirmed. */
  ways: z.array(z.enum(['journal', 'card', 'officer', 'kiosk'])),
  accessPoints: z.array(accessPointOutcome),
  /** Which passphrases may work just now, in the order to try them. Never the passphrases themselves. */
  toTry: z.array(z.enum(['new', 'old'])),
  /** What the person asking may do with this change now. */
  may: z.strictObject({
    move: z.boolean(),
    cancel: z.boolean(),
    giveUp: z.boolean(),
    enter: z.boolean(),
    goOn: z.boolean(),
  }),
});
export type RotationView = z.infer<typeof rotationView>;

export const rotationList = z.strictObject({
  /** Planned, staged and under way, soonest first. */
  calendar: z.array(rotationSummary),
  history: z.array(rotationSummary),
  /** Cursor of the next page of the history. */
  after: z.string().nullable(),
});
export type RotationList = z.infer<typeof rotationList>;

export const entrySheet = z.strictObject({
  rotationId: id,
  ssid: z.string(),
  security,
  hidden: z.boolean(),
  passphrase: z.string(),
  /** The passphrase cut where the eye may rest; joined they are the passphrase. */
  parts: z.array(z.string()),
  /** True when this puts the passphrase before back. */
  goingBack: z.boolean(),
  accessPoints: z.array(accessPointOutcome),
});
export type EntrySheet = z.infer<typeof entrySheet>;

export const listRotations = contract({
  name: 'rotations.list',
  method: 'GET',
  path: '/vessels/:vesselId/rotations',
  summary: 'Changes of the next six weeks, those under way, and the history, newest first',
  access: viewing,
  params: vesselParams,
  query: pageQuery.extend({ networkId: id.optional() }),
  response: rotationList,
});

export const readRotation = contract({
  name: 'rotations.read',
  method: 'GET',
  path: '/vessels/:vesselId/rotations/:rotationId',
  summary: 'One change, access point by access point',
  access: viewing,
  params: rotationParams,
  response: rotationView,
});

export const changeNow = contract({
  name: 'rotations.changeNow',
  method: 'POST',
  path: '/vessels/:vesselId/networks/:networkId/rotations/now',
  summary: "Change a network's passphrase now",
  access: planners,
  params: networkParams,
  body: z.strictObject({
    reason: changeReason.default('routine'),
    /** Does not wait for two ways aboard to be confirmed; asks for a fresh proof of identity. */
    urgent: z.boolean().default(false),
  }),
  response: rotationView,
  status: 201,
});

export const planFor = contract({
  name: 'rotations.planFor',
  method: 'POST',
  path: '/vessels/:vesselId/networks/:networkId/rotations',
  summary: "Plan a network's change for an instant",
  access: planners,
  params: networkParams,
  body: z.strictObject({ dueAt: instant, reason: changeReason.default('routine') }),
  response: rotationView,
  status: 201,
});

export const moveRotation = contract({
  name: 'rotations.move',
  method: 'POST',
  path: '/vessels/:vesselId/rotations/:rotationId/move',
  summary: 'Move a planned or staged change to another instant',
  access: planners,
  params: rotationParams,
  body: z.strictObject({ dueAt: instant }),
  response: rotationView,
});

export const cancelRotation = contract({
  name: 'rotations.cancel',
  method: 'POST',
  path: '/vessels/:vesselId/rotations/:rotationId/cancel',
  summary: 'Cancel a planned or staged change; the plan then sets the next one',
  access: planners,
  params: rotationParams,
  response: z.strictObject({
    cancelled: rotationView,
    /** What the plan set instead; null when the network has nothing to change. */
    next: rotationView.nullable(),
  }),
});

export const giveUpRotation = contract({
  name: 'rotations.giveUp',
  method: 'POST',
  path: '/vessels/:vesselId/rotations/:rotationId/give-up',
  summary: 'Give up a change under way: a new one goes back to the passphrase before',
  access: vessel('rotation.plan.owner', 'rotation.plan.guest', 'rotation.plan.crew', 'rotation.enter'),
  params: rotationParams,
  /** The change that takes over: back to the old passphrase, or the plan's next if nothing had left yet. */
  response: rotationView,
});

export const goOnRotation = contract({
  name: 'rotations.goOn',
  method: 'POST',
  path: '/vessels/:vesselId/rotations/:rotationId/go-on',
  summary: 'Let the boat go on with a change that waits for somebody',
  access: entering,
  params: rotationParams,
  response: rotationView,
});

export const openSheet = contract({
  name: 'rotations.openSheet',
  method: 'POST',
  path: '/vessels/:vesselId/rotations/:rotationId/sheet',
  summary: 'Open the entry sheet: the new passphrase, to be entered access point by access point',
  access: entering,
  secret: true,
  params: rotationParams,
  response: entrySheet,
});

/** `secret` although it answers none: nothing derived from what was typed may be kept for repeats. */
export const confirmAccessPoint = contract({
  name: 'rotations.confirmAccessPoint',
  method: 'POST',
  path: '/vessels/:vesselId/rotations/:rotationId/access-points/:accessPointId/confirm',
  summary: 'Confirm an access point by typing the new passphrase back without seeing it',
  access: entering,
  secret: true,
  params: accessPointParams,
  body: typedBack,
  response: rotationView,
});

export const reportUnreachable = contract({
  name: 'rotations.reportUnreachable',
  method: 'POST',
  path: '/vessels/:vesselId/rotations/:rotationId/access-points/:accessPointId/unreachable',
  summary: 'Say that an access point cannot be reached just now',
  access: entering,
  params: accessPointParams,
  body: z.strictObject({ note: z.string().trim().max(NOTE_MAX).optional() }),
  response: rotationView,
});

export const reportDrift = contract({
  name: 'rotations.reportDrift',
  method: 'POST',
  path: '/vessels/:vesselId/rotations/:rotationId/access-points/:accessPointId/drift',
  summary: 'Say that an access point runs something else than the passphrase in force',
  access: entering,
  params: accessPointParams,
  body: z.strictObject({ seen: z.enum(['old', 'other']) }),
  response: rotationView,
});

/** Typed back like a confirmation, and for the same reason marked `secret`. */
export const acceptDrift = contract({
  name: 'rotations.acceptDrift',
  method: 'POST',
  path: '/vessels/:vesselId/rotations/:rotationId/access-points/:accessPointId/put-right',
  summary: 'Say that an access point runs the passphrase in force again, by typing it back',
  access: entering,
  secret: true,
  params: accessPointParams,
  body: typedBack,
  response: rotationView,
});
