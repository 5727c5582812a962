import { queryOptions } from '@tanstack/react-query';
import type { AcceptInvitation, DeviceView, Enrolment, InvitationView } from '../../../shared/api/auth.ts';
import type { Language } from '../../../shared/api/common.ts';
import type { SessionView } from '../../../shared/api/session.ts';
import { apiGet, apiSend, keepCsrf } from '../../lib/api.ts';

/** Who is signed in. Fails with `ApiError` 401 when nobody is. Keeps the session's token for later changes. */
export const sessionQuery = queryOptions({
  queryKey: ['session'],
  queryFn: async ({ signal }) => {
    const session = await apiGet<SessionView>('/session', { signal });
    keepCsrf(session.csrf);
    return session;
  },
  staleTime: 60_000,
});

interface SignIn {
  email: string;
  password: string;
  code?: string;
}

/** Signs in. Fails with code `code_needed` when the second factor's code is missing, and is then sent again with it. */
export const signIn = (given: SignIn) => apiSend<{ endedOldest: boolean }>('POST', '/session', given);

/** Ends this session. */
export const signOut = () => apiSend('DELETE', '/session');

/** Proves again who is signed in; good for ten minutes on this session. */
export const proveIdentity = (given: { password: string; code?: string }) =>
  apiSend('POST', '/session/proof', given);

/** Asks for a link that sets a new password. The answer is the same whether the address is known or not. */
export const askForReset = (given: { email: string }) => apiSend('POST', '/password-resets', given);

/** Sets the new password by the token of the mail. Does not sign in. */
export const setNewPassword = (given: { token: string; password: string }) =>
  apiSend('POST', '/password-resets/use', given);

/** What an invitation offers, read by the token of the mail. Reading it uses nothing up. */
export const invitationQuery = (token: string) =>
  queryOptions({
    queryKey: ['invitation', token],
    queryFn: ({ signal }) => apiSend<InvitationView>('POST', '/invitations/read', { token }, { signal }),
    staleTime: Number.POSITIVE_INFINITY,
    gcTime: 0,
  });

/** Accepts an invitation. Does not sign in. */
export const acceptInvitation = (given: AcceptInvitation) => apiSend('POST', '/invitations/accept', given);

/** Changes the person's own name and language. */
export const savePerson = (given: { name: string; locale: Language }) => apiSend('PATCH', '/account', given);

/** Changes the password; every other session ends. */
export const changePassword = (given: { current: string; password: string }) =>
  apiSend('PUT', '/account/password', given);

/** Begins enrolling a second factor; it counts only once a code has been given. */
export const beginSecondFactor = () => apiSend<Enrolment>('POST', '/account/second-factor');

/** Ends the enrolment with a code from the app; answers the recovery codes, shown this once. */
export const finishSecondFactor = (given: { code: string }) =>
  apiSend<{ recoveryCodes: string[] }>('PUT', '/account/second-factor', given);

/** Takes the second factor away. */
export const removeSecondFactor = (given: { password: string; code: string }) =>
  apiSend('DELETE', '/account/second-factor', given);

/** Where the person is signed in. */
export const devicesQuery = queryOptions({
  queryKey: ['session', 'devices'],
  queryFn: ({ signal }) => apiGet<{ items: DeviceView[] }>('/account/sessions', { signal }),
});

/** Ends one session of one's own. */
export const endDevice = (id: string) => apiSend('DELETE', `/account/sessions/${id}`);

/** Ends every session of one's own, this one too. */
export const endAllDevices = () => apiSend('DELETE', '/account/sessions');
