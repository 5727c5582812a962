import { queryOptions } from '@tanstack/react-query';
import type { Source } from '../../../shared/api/common.ts';
import { apiGet } from '../../lib/api.ts';

/** What every page of a vessel shows at its head. */
export interface VesselHead {
  id: string;
  name: string;
  /** Where she lies ("Split, berth C14"), or null when not said. */
  lying: string | null;
  source: Source;
  /** IANA name of the zone in force now. */
  zone: string;
  /** Changes due or done today, for the neatline. */
  changesToday: { at: string; network: string; done: boolean }[];
}

/** A vessel's head facts. Fails with 404 when the person has no place on her. */
export const vesselQuery = (vesselId: string) =>
  queryOptions({
    queryKey: ['vessels', vesselId],
    queryFn: ({ signal }) => apiGet<VesselHead>(`/vessels/${vesselId}`, { signal }),
    refetchInterval: 60_000,
  });
