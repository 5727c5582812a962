import { z } from 'zod';
import {
  ACCESS_POINT_NAME_MAX,
  ACCESS_POINTS_MAX,
  CABIN_NAME_MAX,
  CABINS_MAX,
  DECK_NAME_MAX,
  NAME_MAX,
  RETENTION_DAYS_MAX,
  RETENTION_DAYS_MIN,
} from '../rules/limits.ts';
import { email } from './auth.ts';
import { audience, driver, id, instant, nameText, source, vesselParams, vesselRole } from './common.ts';
import { contract, dealer, vessel } from './contract.ts';

const optionalText = (max: number) =>
  z
    .string()
    .trim()
    .max(max, `Keep it to ${max} characters`)
    .transform((text) => (text === '' ? null : text))
    .nullable();

/** What every page of a vessel shows at its head. */
export const vesselHead = z.strictObject({
  id,
  name: z.string(),
  lying: z.string().nullable(),
  source,
  /** IANA name of the zone in force now. */
  zone: z.string(),
  /** Changes due or done on the ship's today, for the neatline; empty for those who may not see networks. */
  changesToday: z.array(z.strictObject({ at: instant, network: z.string(), audience, done: z.boolean() })),
});
export type VesselHead = z.infer<typeof vesselHead>;

export const readVessel = contract({
  name: 'vessels.read',
  method: 'GET',
  path: '/vessels/:vesselId',
  summary: "The vessel's name, berth, source and ship's time",
  access: vessel('vessel.view'),
  params: vesselParams,
  response: vesselHead,
});

const cabinView = z.strictObject({ id, deck: z.string(), name: z.string() });
const zoneView = z.strictObject({ id, zone: z.string(), fromAt: instant });
const accessPointView = z.strictObject({ id, name: z.string(), deck: z.string().nullable() });

export const vesselSettings = z.strictObject({
  id,
  name: z.string(),
  kind: z.string(),
  lengthM: z.number().nullable(),
  guestsMax: z.number().int().nullable(),
  homePort: z.string().nullable(),
  ownerName: z.string().nullable(),
  lying: z.string().nullable(),
  source,
  retentionDays: z.number().int(),
  secondFactorRoles: z.array(vesselRole),
  serialPrefix: z.string(),
  driver,
  dealer: z.string().nullable(),
  /** Ship's time: each zone in force from its instant on, earliest first. */
  zones: z.array(zoneView),
  cabins: z.array(cabinView),
  accessPoints: z.array(accessPointView),
  /** Sent back with a change, so that two people do not overwrite each other. */
  updatedAt: instant,
});
export type VesselSettings = z.infer<typeof vesselSettings>;

export const readVesselSettings = contract({
  name: 'vessels.settings',
  method: 'GET',
  path: '/vessels/:vesselId/settings',
  summary: "All of the vessel's settings",
  access: vessel('vessel.settings'),
  params: vesselParams,
  response: vesselSettings,
});

export const vesselBody = z.strictObject({
  name: nameText(NAME_MAX),
  kind: nameText(60, 'Say what she is, such as motor yacht'),
  lengthM: z
    .number('Give the length in metres')
    .min(1, 'Give the length in metres')
    .max(400, 'Give the length in metres')
    .nullable(),
  guestsMax: z
    .number('Give a whole number')
    .int('Give a whole number')
    .min(0, 'Give a whole number from 0 to 500')
    .max(500, 'Give a whole number from 0 to 500')
    .nullable(),
  homePort: optionalText(NAME_MAX),
  ownerName: optionalText(NAME_MAX),
  lying: optionalText(NAME_MAX),
  source,
  retentionDays: z
    .number('Give whole days')
    .int('Give whole days')
    .min(RETENTION_DAYS_MIN, `At least ${RETENTION_DAYS_MIN} day`)
    .max(RETENTION_DAYS_MAX, `At most ${RETENTION_DAYS_MAX} days`),
  secondFactorRoles: z.array(vesselRole).max(6),
  serialPrefix: z.string().regex(/^[A-Z]{1,3}$/, 'One to three capital letters'),
  updatedAt: instant,
});
export type VesselBody = z.input<typeof vesselBody>;

export const changeVessel = contract({
  name: 'vessels.change',
  method: 'PATCH',
  path: '/vessels/:vesselId',
  summary: "Change the vessel's settings",
  access: vessel('vessel.edit'),
  fresh: true,
  params: vesselParams,
  body: vesselBody,
  response: vesselSettings,
});

export const changeSource = contract({
  name: 'vessels.changeSource',
  method: 'PUT',
  path: '/vessels/:vesselId/source',
  summary: 'Say what feeds the boat just now, and where she lies',
  access: vessel('voyages.edit', 'networks.edit'),
  params: vesselParams,
  body: z.strictObject({ source, lying: optionalText(NAME_MAX).optional() }),
  response: 'empty',
});

export const zoneBody = z.strictObject({
  zone: z.string().min(1, 'Choose a zone from the list').max(64),
  /** Ship's local date and time in the zone before the change, such as 2026-06-20T02:00. */
  fromLocal: z.string().regex(/^\d{4}-\d{2}-\d{2}T\d{2}:\d{2}$/, 'Give a date and a time'),
});

export const addZone = contract({
  name: 'vessels.addZone',
  method: 'POST',
  path: '/vessels/:vesselId/zones',
  summary: "Change ship's time to a zone from a local date and time on",
  access: vessel('vessel.edit'),
  params: vesselParams,
  body: zoneBody,
  response: vesselSettings,
  status: 201,
});

export const removeZone = contract({
  name: 'vessels.removeZone',
  method: 'DELETE',
  path: '/vessels/:vesselId/zones/:zoneId',
  summary: "Take a change of ship's time away",
  access: vessel('vessel.edit'),
  params: vesselParams.extend({ zoneId: id }),
  response: vesselSettings,
});

export const setCabins = contract({
  name: 'vessels.setCabins',
  method: 'PUT',
  path: '/vessels/:vesselId/cabins',
  summary: 'Set the cabins by deck, in their order; those with an id keep their guests',
  access: vessel('vessel.edit'),
  params: vesselParams,
  body: z.strictObject({
    cabins: z
      .array(
        z.strictObject({
          id: id.optional(),
          deck: nameText(DECK_NAME_MAX, 'Give the deck'),
          name: nameText(CABIN_NAME_MAX),
        }),
      )
      .max(CABINS_MAX),
  }),
  response: vesselSettings,
});

export const setAccessPoints = contract({
  name: 'vessels.setAccessPoints',
  method: 'PUT',
  path: '/vessels/:vesselId/access-points',
  summary: 'Set the access points in their order; those with an id stay the same',
  access: vessel('networks.edit'),
  params: vesselParams,
  body: z.strictObject({
    accessPoints: z
      .array(
        z.strictObject({
          id: id.optional(),
          name: nameText(ACCESS_POINT_NAME_MAX),
          deck: optionalText(DECK_NAME_MAX),
        }),
      )
      .max(ACCESS_POINTS_MAX),
  }),
  response: vesselSettings,
});

/** What a dealer says of a vessel it begins to look after; the rest is for her captain to fill in. */
export const newVesselBody = z.strictObject({
  name: nameText(NAME_MAX),
  kind: nameText(60, 'Say what she is, such as motor yacht'),
  homePort: optionalText(NAME_MAX),
  /** Ship's time as an IANA name. */
  zone: z.string().min(1, "Choose the zone of ship's time").max(64),
  captain: z.strictObject({ name: nameText(NAME_MAX), email }),
});
export type NewVesselBody = z.input<typeof newVesselBody>;

export const addVessel = contract({
  name: 'vessels.add',
  method: 'POST',
  path: '/fleet/vessels',
  summary: 'Add a vessel to the fleet and invite her captain by mail',
  access: dealer('fleet.addVessel'),
  fresh: true,
  body: newVesselBody,
  response: z.strictObject({ vesselId: id, name: z.string(), invited: z.string() }),
  status: 201,
});
