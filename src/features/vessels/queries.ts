import { queryOptions } from '@tanstack/react-query';
import type { NewVesselBody, VesselHead } from '../../../shared/api/vessels.ts';
import { apiGet, apiSend } from '../../lib/api.ts';
import { queryClient } from '../../lib/queryClient.ts';

/** A vessel's head facts. Fails with 404 when the person has no place on her. */
export const vesselQuery = (vesselId: string) =>
  queryOptions({
    queryKey: ['vessels', vesselId],
    queryFn: ({ signal }) => apiGet<VesselHead>(`/vessels/${vesselId}`, { signal }),
    refetchInterval: 60_000,
  });

export interface NewVessel {
  vesselId: string;
  name: string;
  /** The captain's address the invitation went to. */
  invited: string;
}

/** Takes a vessel into the dealer's fleet and invites her captain by mail. */
export const addVessel = async (body: NewVesselBody) => {
  const vessel = await apiSend<NewVessel>('POST', '/fleet/vessels', body);
  await queryClient.invalidateQueries({ queryKey: ['fleet'] });
  return vessel;
};
