import { z } from 'zod';
import {
  AGE_LIMIT_DAYS_MAX,
  AGE_LIMIT_DAYS_MIN,
  NOTE_MAX,
  POLICY_BITS_MAX,
  POLICY_BITS_MIN,
  WORDS_MAX,
  WORDS_MIN,
} from '../rules/limits.ts';
import { checkSsid } from '../rules/passphrase.ts';
import { audience, id, instant, networkParams, rotationState, security, vesselParams } from './common.ts';
import { contract, vessel } from './contract.ts';
import { fleetStanding } from './fleet.ts';
import { rotationSummary } from './rotations.ts';

const time = z.string().regex(/^([01]\d|2[0-3]):[0-5]\d$/, 'Give a time such as 02:00');

/** Hours in which a change disturbs least: ISO weekdays (1 Monday) on which they start, ship's time; may pass midnight. */
export const quietHours = z
  .strictObject({
    days: z.array(z.number().int().min(1).max(7)).min(1, 'Choose at least one day'),
    from: time,
    to: time,
  })
  .refine(({ from, to }) => from !== to, { path: ['to'], message: 'Start and end must differ' });

export const policyShape = z.strictObject({
  ageLimitDays: z
    .number('Give whole days')
    .int('Give whole days')
    .min(AGE_LIMIT_DAYS_MIN, `At least ${AGE_LIMIT_DAYS_MIN} day`)
    .max(AGE_LIMIT_DAYS_MAX, `At most ${AGE_LIMIT_DAYS_MAX} days`),
  leastBits: z
    .number('Give whole bits')
    .int('Give whole bits')
    .min(POLICY_BITS_MIN, `At least ${POLICY_BITS_MIN} bits`)
    .max(POLICY_BITS_MAX, `At most ${POLICY_BITS_MAX} bits`),
  words: z
    .number('Give a number of words')
    .int('Give a number of words')
    .min(WORDS_MIN, `At least ${WORDS_MIN} words`)
    .max(WORDS_MAX, `At most ${WORDS_MAX} words`),
  quietHours: z.array(quietHours).max(14),
  onPartyDeparture: z.boolean(),
  onSignOff: z.boolean(),
  onLostCard: z.boolean(),
  onLeak: z.boolean(),
});
export type Policy = z.infer<typeof policyShape>;

export const networkBody = z.strictObject({
  ssid: z.string().superRefine((text, context) => {
    const checked = checkSsid(text);
    if (!checked.ok) context.addIssue({ code: 'custom', message: checked.reason });
  }),
  audience,
  security,
  hidden: z.boolean(),
  carriesEquipment: z.boolean(),
  note: z.string().trim().max(NOTE_MAX, `Keep it to ${NOTE_MAX} characters`).nullable(),
});
export type NetworkBody = z.infer<typeof networkBody>;

export const networkView = z.strictObject({
  id,
  ssid: z.string(),
  audience,
  security,
  hidden: z.boolean(),
  carriesEquipment: z.boolean(),
  note: z.string().nullable(),
  /** What may trip some phones about this name in a code, each a sentence. */
  cautions: z.array(z.string()),
  policy: policyShape,
  /** The passphrase in force; null where none is on record. */
  live: z
    .strictObject({
      passphraseId: id,
      generation: z.number().int(),
      origin: z.enum(['generated', 'typed']),
      liveAt: instant,
      ageDays: z.number(),
      grade: z.enum(['weak', 'fair', 'strong']),
      /** "about 3 hours for someone who recorded one phone joining" */
      strength: z.string(),
    })
    .nullable(),
  standing: fleetStanding,
  holders: z.strictObject({ current: z.number().int(), departed: z.number().int() }),
  /** Lost cards and reported leaks of the passphrase in force. */
  leaks: z.array(
    z.strictObject({
      id,
      kind: z.enum(['lost_card', 'reported']),
      at: instant,
      note: z.string().nullable(),
      serial: z.string().nullable(),
    }),
  ),
  /** The change that is planned, staged or under way. */
  change: rotationSummary.nullable(),
  /** The last change, where an access point was seen to run something else since. */
  drift: rotationSummary.nullable(),
  /** What the person asking may do here. */
  may: z.strictObject({
    plan: z.boolean(),
    reveal: z.boolean(),
    edit: z.boolean(),
    policy: z.boolean(),
    typeIn: z.boolean(),
  }),
});
export type NetworkView = z.infer<typeof networkView>;

export const listNetworks = contract({
  name: 'networks.list',
  method: 'GET',
  path: '/vessels/:vesselId/networks',
  summary: "The vessel's networks with age, strength, holders and next change",
  access: vessel('networks.view'),
  params: vesselParams,
  response: z.strictObject({
    networks: z.array(networkView),
    /** A crossing is on until then: networks with equipment are not changed. */
    crossingUntil: instant.nullable(),
  }),
});

export const networkDetail = networkView.extend({
  /** Who holds the passphrase in force. Names only for those who may see them; else null. */
  holderList: z.array(
    z.strictObject({
      kind: z.enum(['guest', 'crew', 'person']),
      name: z.string().nullable(),
      since: instant,
      through: z.string(),
      departedAt: instant.nullable(),
    }),
  ),
  history: z.array(
    z.strictObject({
      generation: z.number().int(),
      origin: z.enum(['generated', 'typed']),
      grade: z.enum(['weak', 'fair', 'strong']),
      liveAt: instant.nullable(),
      retiredAt: instant.nullable(),
      state: rotationState.nullable(),
    }),
  ),
});
export type NetworkDetail = z.infer<typeof networkDetail>;

export const readNetwork = contract({
  name: 'networks.read',
  method: 'GET',
  path: '/vessels/:vesselId/networks/:networkId',
  summary: 'One network with its holders and history',
  access: vessel('networks.view'),
  params: networkParams,
  response: networkDetail,
});

export const addNetwork = contract({
  name: 'networks.add',
  method: 'POST',
  path: '/vessels/:vesselId/networks',
  summary: 'Add a network, with a policy that suits its audience',
  access: vessel('networks.edit'),
  params: vesselParams,
  body: networkBody,
  response: networkView,
  status: 201,
});

export const changeNetwork = contract({
  name: 'networks.change',
  method: 'PATCH',
  path: '/vessels/:vesselId/networks/:networkId',
  summary: 'Change a network; a new name means every device joins again',
  access: vessel('networks.edit'),
  params: networkParams,
  body: networkBody,
  /** `notice`: what has to be done aboard because of it, as a sentence. */
  response: networkView.extend({ notice: z.string().nullable() }),
});

export const removeNetwork = contract({
  name: 'networks.remove',
  method: 'DELETE',
  path: '/vessels/:vesselId/networks/:networkId',
  summary: 'Remove a network; its log and history stay',
  access: vessel('networks.edit'),
  fresh: true,
  params: networkParams,
  response: 'empty',
});

export const changePolicy = contract({
  name: 'networks.changePolicy',
  method: 'PUT',
  path: '/vessels/:vesselId/networks/:networkId/policy',
  summary: "Change a network's rules; its plan is looked at again",
  access: vessel('policy.edit'),
  fresh: true,
  params: networkParams,
  body: policyShape,
  response: networkView,
});

export const reportLeak = contract({
  name: 'networks.reportLeak',
  method: 'POST',
  path: '/vessels/:vesselId/networks/:networkId/leaks',
  summary: 'Report that the passphrase in force leaked; its change moves up',
  access: vessel('exposure.report'),
  params: networkParams,
  body: z.strictObject({
    note: z.string().trim().max(NOTE_MAX, `Keep it to ${NOTE_MAX} characters`).optional(),
  }),
  response: networkView,
  status: 201,
});

export const withdrawLeak = contract({
  name: 'networks.withdrawLeak',
  method: 'DELETE',
  path: '/vessels/:vesselId/networks/:networkId/leaks/:leakId',
  summary: 'Withdraw a report that was a mistake',
  access: vessel('exposure.report'),
  params: networkParams.extend({ leakId: id }),
  response: networkView,
});
