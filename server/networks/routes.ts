import * as api from '../../shared/api/networks.ts';
import { notFound } from '../errors.ts';
import { endpoint } from '../http/endpoint.ts';
import { crossingUntil } from '../rotations/handOut.ts';
import {
  addNetwork,
  type Change,
  changeNetwork,
  changePolicy,
  removeNetwork,
  reportLeak,
  withdrawLeak,
} from './changeNetworks.ts';
import { type Asking, readNetwork, readNetworkDetail, readNetworks } from './readNetworks.ts';

type Wide = Omit<Change, 'vesselId'> & {
  readonly params: { readonly vesselId: string };
  readonly actor: { readonly roles: Asking['roles'] };
};
const changeOf = ({ services, tx, actor, params, now }: Wide): Change => ({
  services,
  tx,
  actor,
  now,
  vesselId: params.vesselId,
});
const askingOf = ({ actor, params, now }: Wide): Asking => ({
  vesselId: params.vesselId,
  roles: actor.roles,
  now,
});

/** Does a verb about one network of the vessel, then shows the network as it is now. */
async function andShow(context: Wide, networkId: string, verb: (change: Change) => Promise<void>) {
  const { services, tx, params } = context;
  const known = await services.db.row(
    tx,
    'SELECT 1 FROM networks WHERE id = $network AND vessel_id = $vessel AND removed_at IS NULL',
    { network: networkId, vessel: params.vesselId },
  );
  if (!known) throw notFound();
  await verb(changeOf(context));
  return readNetwork(services, tx, askingOf(context), networkId);
}

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
    handle: (context) =>
      andShow(context, context.params.networkId, (change) =>
        changeNetwork(change, context.params.networkId, context.body),
      ),
  }),
  endpoint(api.removeNetwork, {
    handle: async (context) => {
      await removeNetwork(changeOf(context), context.params.networkId);
      return undefined;
    },
  }),
  endpoint(api.changePolicy, {
    handle: (context) =>
      andShow(context, context.params.networkId, (change) =>
        changePolicy(change, context.params.networkId, context.body),
      ),
  }),
  endpoint(api.reportLeak, {
    handle: (context) =>
      andShow(context, context.params.networkId, (change) =>
        reportLeak(change, context.params.networkId, context.body.note),
      ),
  }),
  endpoint(api.withdrawLeak, {
    handle: (context) =>
      andShow(context, context.params.networkId, (change) =>
        withdrawLeak(change, context.params.networkId, context.params.leakId),
      ),
  }),
];
