import { type FetchQueryOptions, QueryClient, type QueryKey } from '@tanstack/react-query';
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

/** Starts a load without waiting for it: a page's loader starts all of its loads, and the page shows how far each is. */
export function startLoad<T, E, D, K extends QueryKey>(query: FetchQueryOptions<T, E, D, K>): void {
  void queryClient.prefetchQuery(query);
}
