import { keepPreviousData, queryOptions } from '@tanstack/react-query';
import type { FleetVesselView, FleetView } from '../../../shared/api/fleet.ts';
import type { FleetSort, Standing } from '../../../shared/rules/fleet.ts';
import { apiDownload, apiGet } from '../../lib/api.ts';

/** What of the fleet's table is wanted; kept in the page's address. */
export interface FleetWish {
  sort: FleetSort;
  standing: Standing | '';
  search: string;
  page: number;
}

/** The fleet's figures, dots and one page of its table. */
export const fleetQuery = (wish: FleetWish) =>
  queryOptions({
    queryKey: ['fleet', 'view', wish],
    queryFn: ({ signal }) => apiGet<FleetView>('/fleet', { query: { ...wish }, signal }),
    placeholderData: keepPreviousData,
    refetchInterval: 60_000,
  });

/** One vessel as its dealer sees it. */
export const fleetVesselQuery = (vesselId: string) =>
  queryOptions({
    queryKey: ['fleet', 'vessel', vesselId],
    queryFn: ({ signal }) => apiGet<FleetVesselView>(`/fleet/vessels/${vesselId}`, { signal }),
  });

/** Saves the whole fleet as CSV, one line a network. */
export const exportFleet = () =>
  apiDownload('POST', '/fleet/export', { body: {}, fallbackName: 'fleet.csv' });
