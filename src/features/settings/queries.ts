import { queryOptions } from '@tanstack/react-query';
import type { Source } from '../../../shared/api/common.ts';
import type { VesselBody, VesselSettings } from '../../../shared/api/vessels.ts';
import { apiGet, apiSend } from '../../lib/api.ts';
import { queryClient } from '../../lib/queryClient.ts';

/** All of a vessel's settings. */
export const settingsQuery = (vesselId: string) =>
  queryOptions({
    queryKey: ['vessels', vesselId, 'settings'],
    queryFn: ({ signal }) => apiGet<VesselSettings>(`/vessels/${vesselId}/settings`, { signal }),
  });

/** Puts what the server answered on the page, and has everything else of the vessel fetched again when next shown. */
async function keep(vesselId: string, settings: VesselSettings): Promise<VesselSettings> {
  const { queryKey } = settingsQuery(vesselId);
  queryClient.setQueryData(queryKey, settings);
  await queryClient.invalidateQueries({
    queryKey: ['vessels', vesselId],
    predicate: (query) => query.queryKey[2] !== 'settings',
  });
  // The head carries her name into the list of one's vessels.
  await queryClient.invalidateQueries({ queryKey: ['session'], exact: true });
  return settings;
}

/** Saves the vessel's own facts. Fails with `conflict` when somebody else changed them since `updatedAt`. */
export const saveVessel = async (vesselId: string, body: VesselBody) =>
  keep(vesselId, await apiSend<VesselSettings>('PATCH', `/vessels/${vesselId}`, body));

/** Says where she lies and what feeds her just now. */
export const saveSource = async (vesselId: string, body: { source: Source; lying: string }) => {
  await apiSend('PUT', `/vessels/${vesselId}/source`, body);
  await queryClient.invalidateQueries({ queryKey: ['vessels', vesselId] });
};

/** Changes ship's time to a zone, from a date and time on the clock in force before it. */
export const addZone = async (vesselId: string, body: { zone: string; fromLocal: string }) =>
  keep(vesselId, await apiSend<VesselSettings>('POST', `/vessels/${vesselId}/zones`, body));

export const removeZone = async (vesselId: string, zoneId: string) =>
  keep(vesselId, await apiSend<VesselSettings>('DELETE', `/vessels/${vesselId}/zones/${zoneId}`));

/** A cabin or an access point as the editor sends it; without an id it is new. */
export interface ListedPlace {
  id?: string | undefined;
  deck: string;
  name: string;
}

export const saveCabins = async (vesselId: string, cabins: readonly ListedPlace[]) =>
  keep(vesselId, await apiSend<VesselSettings>('PUT', `/vessels/${vesselId}/cabins`, { cabins }));

export const saveAccessPoints = async (vesselId: string, accessPoints: readonly ListedPlace[]) =>
  keep(
    vesselId,
    await apiSend<VesselSettings>('PUT', `/vessels/${vesselId}/access-points`, { accessPoints }),
  );
