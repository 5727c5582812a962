import * as api from '../../shared/api/networks.ts';
import { endpoint } from '../http/endpoint.ts';
import { crossingUntil } from '../rotations/handOut.ts';
import { changeOf } from '../vessels/change.ts';
import { addNetwork, changeNetwork, changePolicy } from './changeNetworks.ts';
import { reportLeak, withdrawLeak } from './leaks.ts';
import { type Asking, readNetwork, readNetworkDetail, readNetworks } from './readNetworks.ts';
import { removeNetwork } from './removeNetwork.ts';

type Wide = Parameters<typeof changeOf>[0];
const askingOf = ({ actor, params, now }: Wide): Asking => ({
  vesselId: params.vesselId,
  personId: actor.personId,
  roles: actor.roles,
  now,
});

/** Shows the network as it is now, after a verb about it. */
const shown = ({ services, tx, params, ...context }: Wide & { params: { networkId: string } }) =>
  readNetwork(services, tx, askingOf({ services, tx, params, ...context }), params.networkId);

export const networkRoutes = [
  endpoint(api.listNetworks, {
    handle: async (context) => ({
      networks: await readNetworks(context.services, context.tx, askingOf(context)),
      crossingUntil:
        (
          await crossingUntil(context.services, context.tx, context.params.vesselId, context.now)
        )?.toISOString() ?? null,
    }),
  }),
  endpoint(api.readNetwork, {
    handle: (context) =>
      readNetworkDetail(context.services, context.tx, askingOf(context), context.params.networkId),
  }),
  endpoint(api.addNetwork, {
    handle: async (context) =>
      readNetwork(
        context.services,
        context.tx,
        askingOf(context),
        await addNetwork(changeOf(context), context.body),
      ),
  }),
  endpoint(api.changeNetwork, {
    handle: async (context) => {
      const notice = await changeNetwork(changeOf(context), context.params.networkId, context.body);
      return { ...(await shown(context)), notice };
    },
  }),
  endpoint(api.removeNetwork, {
    handle: async (context) => {
      await removeNetwork(changeOf(context), context.params.networkId);
      return undefined;
    },
  }),
  endpoint(api.changePolicy, {
    handle: async (context) => {
      await changePolicy(changeOf(context), context.params.networkId, context.body);
      return shown(context);
    },
  }),
  endpoint(api.reportLeak, {
    handle: async (context) => {
      await reportLeak(changeOf(context), context.params.networkId, context.body.note);
      return shown(context);
    },
  }),
  endpoint(api.withdrawLeak, {
    handle: async (context) => {
      await withdrawLeak(changeOf(context), context.params.networkId, context.params.leakId);
      return shown(context);
    },
  }),
];
