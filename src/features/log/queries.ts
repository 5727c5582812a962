import { infiniteQueryOptions, queryOptions } from '@tanstack/react-query';
import type { HoldersView } from '../../../shared/api/handovers.ts';
import type { LogPage } from '../../../shared/api/log.ts';
import { apiDownload, apiGet } from '../../lib/api.ts';

/** What the log is narrowed to; kept in the page's address. */
export interface LogWish {
  networkId: string;
  kind: string;
  person: string;
  from: string;
  to: string;
}

/** The wish without what is empty, as the server takes it. A single letter is not searched for yet. */
function asked(wish: LogWish): Record<string, string> {
  return Object.fromEntries(
    Object.entries(wish).filter(
      ([key, value]) => value !== '' && !(key === 'person' && value.trim().length < 2),
    ),
  );
}

/** The log, newest first, page by page. */
export const logQuery = (vesselId: string, wish: LogWish) =>
  infiniteQueryOptions({
    queryKey: ['vessels', vesselId, 'log', asked(wish)],
    queryFn: ({ signal, pageParam }) =>
      apiGet<LogPage>(`/vessels/${vesselId}/log`, { query: { ...asked(wish), after: pageParam }, signal }),
    initialPageParam: null as string | null,
    getNextPageParam: ({ after }) => after,
  });

/** Who holds each network's passphrase in force. */
export const holdersQuery = (vesselId: string) =>
  queryOptions({
    queryKey: ['vessels', vesselId, 'holders'],
    queryFn: ({ signal }) => apiGet<HoldersView>(`/vessels/${vesselId}/holders`, { signal }),
  });

/** Saves what is shown as CSV; the export is itself in the log. */
export const exportLog = (vesselId: string, wish: LogWish) =>
  apiDownload('POST', `/vessels/${vesselId}/log/export`, { body: asked(wish), fallbackName: 'log.csv' });
