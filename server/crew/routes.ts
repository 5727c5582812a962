import * as api from '../../shared/api/crew.ts';
import { endpoint } from '../http/endpoint.ts';
import { addCrew, type Change, changeCrew, listCrew, signBackOn, signOff } from './crew.ts';
import { readOwnCode, readOwnPage } from './ownPage.ts';

type Wide = Omit<Change, 'vesselId'> & { readonly params: { readonly vesselId: string } };
const changeOf = ({ services, tx, actor, params, now }: Wide): Change => ({
  services,
  tx,
  actor,
  now,
  vesselId: params.vesselId,
});

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
