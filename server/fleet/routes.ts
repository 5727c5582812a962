import * as api from '../../shared/api/fleet.ts';
import { endpoint } from '../http/endpoint.ts';
import { exportFleet } from './exportFleet.ts';
import { readFleet } from './readFleet.ts';
import { readFleetVessel } from './readFleetVessel.ts';

export const fleetRoutes = [
  endpoint(api.readFleet, {
    handle: ({ services, tx, actor, query, now }) =>
      readFleet(services, tx, { dealerId: actor.dealerId, query, now }),
  }),
  endpoint(api.exportFleet, {
    handle: ({ services, tx, actor, now }) => exportFleet(services, tx, { dealerId: actor.dealerId, now }),
  }),
  endpoint(api.readFleetVessel, {
    handle: ({ services, tx, actor, params, now }) =>
      readFleetVessel(services, tx, { dealerId: actor.dealerId, vesselId: params.vesselId, now }),
  }),
];
