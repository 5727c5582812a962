import * as api from '../../shared/api/vessels.ts';
import { endpoint } from '../http/endpoint.ts';
import { addVessel } from './addVessel.ts';
import { changeOf } from './change.ts';
import {
  addZone,
  changeSource,
  changeVessel,
  removeZone,
  setAccessPoints,
  setCabins,
} from './changeVessel.ts';
import { readSettings, readVessel } from './readVessel.ts';

export const vesselRoutes = [
  endpoint(api.addVessel, { handle: (context) => addVessel(context, context.body) }),
  endpoint(api.readVessel, {
    handle: ({ services, tx, actor, params, now }) =>
      readVessel(services, tx, { vesselId: params.vesselId, roles: actor.roles, now }),
  }),
  endpoint(api.readVesselSettings, {
    handle: ({ services, tx, params }) => readSettings(services, tx, params.vesselId),
  }),
  endpoint(api.changeVessel, {
    handle: async (context) => {
      await changeVessel(changeOf(context), context.body);
      return readSettings(context.services, context.tx, context.params.vesselId);
    },
  }),
  endpoint(api.changeSource, {
    handle: async (context) => {
      await changeSource(changeOf(context), context.body);
      return undefined;
    },
  }),
  endpoint(api.addZone, {
    handle: async (context) => {
      await addZone(changeOf(context), context.body);
      return readSettings(context.services, context.tx, context.params.vesselId);
    },
  }),
  endpoint(api.removeZone, {
    handle: async (context) => {
      await removeZone(changeOf(context), context.params.zoneId);
      return readSettings(context.services, context.tx, context.params.vesselId);
    },
  }),
  endpoint(api.setCabins, {
    handle: async (context) => {
      await setCabins(changeOf(context), context.body.cabins);
      return readSettings(context.services, context.tx, context.params.vesselId);
    },
  }),
  endpoint(api.setAccessPoints, {
    handle: async (context) => {
      await setAccessPoints(changeOf(context), context.body.accessPoints);
      return readSettings(context.services, context.tx, context.params.vesselId);
    },
  }),
];
