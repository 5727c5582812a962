import { queryOptions } from '@tanstack/react-query';
import type { NetworkBody, NetworkDetail, NetworkView, Policy } from '../../../shared/api/networks.ts';
import type { PassphraseVerdict, Revealed } from '../../../shared/api/passphrases.ts';
import { apiGet, apiSend } from '../../lib/api.ts';

/** A vessel's networks as its page shows them. */
export interface Networks {
  networks: NetworkView[];
  /** A crossing is on until then: networks with equipment are not changed. */
  crossingUntil: string | null;
}

const below = (vesselId: string, networkId: string) => `/vessels/${vesselId}/networks/${networkId}`;

/** What every change to a network makes stale: all that is known of the vessel. */
export const vesselKey = (vesselId: string) => ['vessels', vesselId] as const;

/** The vessel's networks with age, holders and next change. */
export const networksQuery = (vesselId: string) =>
  queryOptions({
    queryKey: ['vessels', vesselId, 'networks'],
    queryFn: ({ signal }) => apiGet<Networks>(`/vessels/${vesselId}/networks`, { signal }),
    refetchInterval: 15_000,
  });

/** One network with its holders and history. */
export const networkQuery = (vesselId: string, networkId: string) =>
  queryOptions({
    queryKey: ['vessels', vesselId, 'networks', networkId],
    queryFn: ({ signal }) => apiGet<NetworkDetail>(below(vesselId, networkId), { signal }),
    refetchInterval: 15_000,
  });

export const addNetwork = (vesselId: string, network: NetworkBody) =>
  apiSend<NetworkView>('POST', `/vessels/${vesselId}/networks`, network);

/** Answers what has to be done aboard because of it, as a sentence. */
export const changeNetwork = (vesselId: string, networkId: string, network: NetworkBody) =>
  apiSend<NetworkView & { notice: string | null }>('PATCH', below(vesselId, networkId), network);

export const removeNetwork = (vesselId: string, networkId: string) =>
  apiSend('DELETE', below(vesselId, networkId));

export const changePolicy = (vesselId: string, networkId: string, policy: Policy) =>
  apiSend<NetworkView>('PUT', `${below(vesselId, networkId)}/policy`, policy);

export const reportLeak = (vesselId: string, networkId: string, note: string) =>
  apiSend<NetworkView>('POST', `${below(vesselId, networkId)}/leaks`, note ? { note } : {});

export const withdrawLeak = (vesselId: string, networkId: string, leakId: string) =>
  apiSend<NetworkView>('DELETE', `${below(vesselId, networkId)}/leaks/${leakId}`);

/** The passphrases that may work now, in the order to try them. The server writes it in the log first. */
export const reveal = (vesselId: string, networkId: string) =>
  apiSend<Revealed>('POST', `${below(vesselId, networkId)}/reveal`);

/** Judges a typed passphrase; nothing of it is kept. */
export const checkTyped = (vesselId: string, networkId: string, passphrase: string) =>
  apiSend<PassphraseVerdict>('POST', `${below(vesselId, networkId)}/passphrase/check`, { passphrase });

export const typeIn = (
  vesselId: string,
  networkId: string,
  given: { passphrase: string; since: string | null },
) =>
  apiSend<{ network: NetworkView; verdict: PassphraseVerdict }>(
    'POST',
    `${below(vesselId, networkId)}/passphrase`,
    given,
  );
