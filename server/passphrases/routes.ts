import * as api from '../../shared/api/passphrases.ts';
import { endpoint } from '../http/endpoint.ts';
import { readNetwork } from '../networks/readNetworks.ts';
import { type Asked, reveal } from './reveal.ts';
import { judge, presentVerdict, typeIn } from './typeIn.ts';

type Wide = Omit<Asked, 'vesselId' | 'networkId'> & {
  readonly params: { readonly vesselId: string; readonly networkId: string };
};
const askedOf = ({ services, tx, actor, now, params }: Wide): Asked => ({
  services,
  tx,
  actor,
  now,
  ...params,
});

export const passphraseRoutes = [
  endpoint(api.checkTyped, {
    prepare: ({ services, params, body }) =>
      judge(services, params.vesselId, params.networkId, body.passphrase),
    handle: async ({ prepared }) => presentVerdict(prepared),
  }),
  endpoint(api.typeIn, {
    prepare: ({ services, params, body }) =>
      judge(services, params.vesselId, params.networkId, body.passphrase),
    handle: async (context) => {
      const { services, tx, actor, params, now, prepared } = context;
      const { passphrase, since } = context.body;
      await typeIn(askedOf(context), { passphrase, since: since ? new Date(since) : null }, prepared);
      return {
        network: await readNetwork(
          services,
          tx,
          { vesselId: params.vesselId, personId: actor.personId, roles: actor.roles, now },
          params.networkId,
        ),
        verdict: presentVerdict(prepared),
      };
    },
  }),
  endpoint(api.reveal, { handle: (context) => reveal(askedOf(context)) }),
];
