import { queryOptions } from '@tanstack/react-query';
import type { CrewBody, CrewView, OwnPage } from '../../../shared/api/crew.ts';
import type { Revealed } from '../../../shared/api/passphrases.ts';
import { apiGet, apiSend } from '../../lib/api.ts';

/** The crew aboard, and those signed off. */
export const crewQuery = (vesselId: string) =>
  queryOptions({
    queryKey: ['vessels', vesselId, 'crew'],
    queryFn: ({ signal }) =>
      apiGet<{ aboard: CrewView[]; signedOff: CrewView[] }>(`/vessels/${vesselId}/crew`, { signal }),
  });

/** The signed-in person's own page: when the crew network changed and changes next. */
export const ownPageQuery = (vesselId: string) =>
  queryOptions({
    queryKey: ['vessels', vesselId, 'crew', 'me'],
    queryFn: ({ signal }) => apiGet<OwnPage>(`/vessels/${vesselId}/crew/me`, { signal }),
    refetchInterval: 60_000,
  });

/** The crew network's code; the server writes the reading in the log first. */
export const readOwnCode = (vesselId: string, networkId: string) =>
  apiSend<Revealed>('POST', `/vessels/${vesselId}/networks/${networkId}/own-code`);

export const saveCrew = (vesselId: string, crewMemberId: string | null, body: CrewBody) =>
  crewMemberId === null
    ? apiSend<CrewView>('POST', `/vessels/${vesselId}/crew`, body)
    : apiSend<CrewView>('PATCH', `/vessels/${vesselId}/crew/${crewMemberId}`, body);

export interface SignedOff {
  member: CrewView;
  exposed: { network: string; changeAt: string | null }[];
}
export const signOff = (vesselId: string, crewMemberId: string) =>
  apiSend<SignedOff>('POST', `/vessels/${vesselId}/crew/${crewMemberId}/sign-off`);
export const signBackOn = (vesselId: string, crewMemberId: string) =>
  apiSend<CrewView>('POST', `/vessels/${vesselId}/crew/${crewMemberId}/back`);
