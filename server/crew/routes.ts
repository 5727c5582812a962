import * as api from '../../shared/api/crew.ts';
import { endpoint } from '../http/endpoint.ts';
import { changeOf } from '../vessels/change.ts';
import { addCrew, changeCrew, listCrew, signBackOn, signOff } from './crew.ts';
import { readOwnCode, readOwnPage } from './ownPage.ts';

export const crewRoutes = [
  endpoint(api.readOwnPage, {
    handle: ({ services, tx, actor, params, now }) =>
      readOwnPage({ services, tx, actor, now, vesselId: params.vesselId }),
  }),
  endpoint(api.readOwnCode, {
    handle: ({ services, tx, actor, params, now }) => readOwnCode({ services, tx, actor, now, ...params }),
  }),
  endpoint(api.listCrew, {
    handle: ({ services, tx, params, now }) => listCrew(services, tx, params.vesselId, now),
  }),
  endpoint(api.addCrew, { handle: (context) => addCrew(changeOf(context), context.body) }),
  endpoint(api.changeCrew, {
    handle: (context) => changeCrew(changeOf(context), context.params.crewMemberId, context.body),
  }),
  endpoint(api.signOff, { handle: (context) => signOff(changeOf(context), context.params.crewMemberId) }),
  endpoint(api.signBackOn, {
    handle: (context) => signBackOn(changeOf(context), context.params.crewMemberId),
  }),
];
