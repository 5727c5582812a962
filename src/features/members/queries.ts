import { queryOptions } from '@tanstack/react-query';
import type { MemberView, OpenInvitationView } from '../../../shared/api/auth.ts';
import type { VesselRole } from '../../../shared/rules/permissions.ts';
import { apiGet, apiSend } from '../../lib/api.ts';

export interface Members {
  members: MemberView[];
  invitations: OpenInvitationView[];
}

/** How often a mail that is still waiting is looked at again, in milliseconds. */
const WAITING_MS = 3_000;

/** Who has which role, and open invitations; asked again while a mail has not gone out yet. */
export const membersQuery = (vesselId: string) =>
  queryOptions({
    queryKey: ['vessels', vesselId, 'members'],
    queryFn: ({ signal }) => apiGet<Members>(`/vessels/${vesselId}/members`, { signal }),
    refetchInterval: ({ state }) =>
      state.data?.invitations.some(({ mail }) => mail === 'waiting') ? WAITING_MS : false,
  });

export interface Invite {
  email: string;
  name?: string;
  roles: readonly VesselRole[];
}

/** Invites somebody by mail, once, for three days; an earlier invitation to the same address ends. */
export const invite = (vesselId: string, given: Invite) =>
  apiSend<{ id: string }>('POST', `/vessels/${vesselId}/invitations`, given);

export const withdrawInvitation = (vesselId: string, invitationId: string) =>
  apiSend('DELETE', `/vessels/${vesselId}/invitations/${invitationId}`);

/** Sets somebody's roles; none ends their place aboard at once. Fails with `not_now` for the last captain. */
export const setRoles = (
  vesselId: string,
  personId: string,
  given: { roles: readonly VesselRole[]; suspended: boolean },
) => apiSend('PUT', `/vessels/${vesselId}/members/${personId}`, given);
