import { queryOptions } from '@tanstack/react-query';
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

/** Signs in. Fails with code `code_needed` when the second factor's code is missing, and is then sent again with it. */
export const signIn = (given: { email: string; password: string; code?: string }) =>
  apiSend('POST', '/session', given);

/** Ends this session. */
export const signOut = () => apiSend('DELETE', '/session');
