import { QueryClient } from '@tanstack/react-query';
import { AwayError } from './errors.ts';
import { whenServerReturns } from './serverState.ts';

/**
 * The one client of the app; loaders, hooks and invalidation share it. Nothing is kept on disk. Reads are tried
 * again only when nobody answered, and all of them once the server is back; changes are never repeated by
 * themselves.
 */
export const queryClient = new QueryClient({
  defaultOptions: {
    queries: {
      staleTime: 10_000,
      gcTime: 5 * 60_000,
      networkMode: 'always',
      retry: (count, error) => error instanceof AwayError && count < 2,
      retryDelay: (count) => Math.min(500 * 2 ** count, 4_000),
    },
    mutations: { networkMode: 'always', retry: false },
  },
});

whenServerReturns(() => void queryClient.invalidateQueries());

/** Starts a page's loads together, without waiting: the page shows how far each has come. */
export function startLoads(...queries: readonly Parameters<QueryClient['prefetchQuery']>[0][]): null {
  for (const query of queries) void queryClient.prefetchQuery(query);
  return null;
}
