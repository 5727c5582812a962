import { z } from 'zod';
import { NAME_MAX } from '../rules/limits.ts';
import { email } from './auth.ts';
import { id, instant, language, nameText, vesselParams } from './common.ts';
import { contract, vessel } from './contract.ts';
import { revealed } from './passphrases.ts';

export const crewBody = z.strictObject({
  name: nameText(NAME_MAX),
  position: nameText(60),
  department: z.string().trim().max(60, 'Keep it to 60 characters'),
  email: z.union([email, z.literal('').transform(() => null)]).nullable(),
  language,
  signedOnAt: instant,
});
export type CrewBody = z.input<typeof crewBody>;

export const crewView = z.strictObject({
  id,
  name: z.string(),
  position: z.string(),
  department: z.string(),
  email: z.string().nullable(),
  language,
  signedOnAt: instant,
  signedOffAt: instant.nullable(),
  /** Has an account of their own here. */
  account: z.boolean(),
  /** Live passphrases they hold, by the network's name. */
  holds: z.array(z.string()),
});
export type CrewView = z.infer<typeof crewView>;

export const listCrew = contract({
  name: 'crew.list',
  method: 'GET',
  path: '/vessels/:vesselId/crew',
  summary: 'The crew: aboard by department, then those signed off who still hold a live passphrase',
  access: vessel('crew.view'),
  params: vesselParams,
  response: z.strictObject({ aboard: z.array(crewView), signedOff: z.array(crewView) }),
});

export const addCrew = contract({
  name: 'crew.add',
  method: 'POST',
  path: '/vessels/:vesselId/crew',
  summary: 'Sign somebody on',
  access: vessel('crew.manage'),
  params: vesselParams,
  body: crewBody,
  response: crewView,
  status: 201,
});

const crewParams = vesselParams.extend({ crewMemberId: id });

export const changeCrew = contract({
  name: 'crew.change',
  method: 'PATCH',
  path: '/vessels/:vesselId/crew/:crewMemberId',
  summary: 'Correct a crew entry',
  access: vessel('crew.manage'),
  params: crewParams,
  body: crewBody,
  response: crewView,
});

export const signOff = contract({
  name: 'crew.signOff',
  method: 'POST',
  path: '/vessels/:vesselId/crew/:crewMemberId/sign-off',
  summary: 'Sign somebody off: what they hold is exposed, their roles here end',
  access: vessel('crew.manage'),
  params: crewParams,
  response: z.strictObject({
    member: crewView,
    /** Networks whose live passphrase they know, with the change that now comes. */
    exposed: z.array(z.strictObject({ network: z.string(), changeAt: instant.nullable() })),
  }),
});

export const signBackOn = contract({
  name: 'crew.signBackOn',
  method: 'POST',
  path: '/vessels/:vesselId/crew/:crewMemberId/back',
  summary: 'Sign somebody back on who had signed off',
  access: vessel('crew.manage'),
  params: crewParams,
  response: crewView,
});

export const ownPage = z.strictObject({
  /** The crew networks, usually one. */
  networks: z.array(
    z.strictObject({
      networkId: id,
      ssid: z.string(),
      since: instant.nullable(),
      nextChangeAt: instant.nullable(),
      /** When this person last read the passphrase in force; null if not yet. */
      readAt: instant.nullable(),
    }),
  ),
});
export type OwnPage = z.infer<typeof ownPage>;

export const readOwnPage = contract({
  name: 'crew.ownPage',
  method: 'GET',
  path: '/vessels/:vesselId/crew/me',
  summary: 'When the crew network changed and changes next; no passphrase',
  access: vessel('crew.own'),
  params: vesselParams,
  response: ownPage,
});

export const readOwnCode = contract({
  name: 'crew.ownCode',
  method: 'POST',
  path: '/vessels/:vesselId/networks/:networkId/own-code',
  summary: "The crew network's code on one's own page; reading it is a handover in the log",
  access: vessel('crew.own'),
  secret: true,
  params: vesselParams.extend({ networkId: id }),
  response: revealed,
});
