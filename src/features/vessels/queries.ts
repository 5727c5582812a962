import { queryOptions } from '@tanstack/react-query';
import type { VesselHead } from '../../../shared/api/vessels.ts';
import { apiGet } from '../../lib/api.ts';

/** A vessel's head facts. Fails with 404 when the person has no place on her. */
export const vesselQuery = (vesselId: string) =>
  queryOptions({
    queryKey: ['vessels', vesselId],
    queryFn: ({ signal }) => apiGet<VesselHead>(`/vessels/${vesselId}`, { signal }),
    refetchInterval: 60_000,
  });
