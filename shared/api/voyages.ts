import { z } from 'zod';
import { NAME_MAX } from '../rules/limits.ts';
import { id, instant, nameText, vesselParams, voyageKind } from './common.ts';
import { contract, vessel } from './contract.ts';

const voyageParams = z.strictObject({ vesselId: id, voyageId: id });
const port = nameText(NAME_MAX).nullable();

/** A stretch of the calendar. Who may not see guests reads a neutral title ("Charter"). */
export const voyageView = z.strictObject({
  id,
  kind: voyageKind,
  title: z.string(),
  startsAt: instant,
  endsAt: instant,
  fromPort: z.string().nullable(),
  toPort: z.string().nullable(),
});
export type VoyageView = z.infer<typeof voyageView>;

export const voyageList = z.strictObject({
  /** IANA zone of ship's time in force now. */
  zone: z.string(),
  voyages: z.array(voyageView),
});
export type VoyageList = z.infer<typeof voyageList>;

export const voyageForm = z.strictObject({
  kind: voyageKind,
  title: nameText(NAME_MAX),
  startsAt: instant,
  endsAt: instant,
  fromPort: port.default(null),
  toPort: port.default(null),
});
export type VoyageForm = z.output<typeof voyageForm>;

export const voyageChange = z.strictObject({
  kind: voyageKind.optional(),
  title: nameText(NAME_MAX).optional(),
  startsAt: instant.optional(),
  endsAt: instant.optional(),
  fromPort: port.optional(),
  toPort: port.optional(),
});

export const listVoyages = contract({
  name: 'voyages.list',
  method: 'GET',
  path: '/vessels/:vesselId/voyages',
  summary: "The vessel's calendar, earliest first: a year back and two ahead unless asked otherwise",
  access: vessel('voyages.view'),
  params: vesselParams,
  query: z.strictObject({ from: instant.optional(), to: instant.optional() }),
  response: voyageList,
});

export const createVoyage = contract({
  name: 'voyages.create',
  method: 'POST',
  path: '/vessels/:vesselId/voyages',
  summary: 'Add a stretch to the calendar; planned changes follow',
  access: vessel('voyages.edit'),
  params: vesselParams,
  body: voyageForm,
  response: voyageView,
  status: 201,
});

export const editVoyage = contract({
  name: 'voyages.edit',
  method: 'PATCH',
  path: '/vessels/:vesselId/voyages/:voyageId',
  summary: 'Change a stretch of the calendar; planned changes follow',
  access: vessel('voyages.edit'),
  params: voyageParams,
  body: voyageChange,
  response: voyageView,
});

export const deleteVoyage = contract({
  name: 'voyages.delete',
  method: 'DELETE',
  path: '/vessels/:vesselId/voyages/:voyageId',
  summary: 'Take a stretch off the calendar; its parties stay',
  access: vessel('voyages.edit'),
  params: voyageParams,
  response: z.strictObject({ id }),
});
