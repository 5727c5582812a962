import { queryOptions } from '@tanstack/react-query';
import type { ChangeReason, EntrySheet, RotationList, RotationView } from '../../../shared/api/rotations.ts';
import type { VesselSettings } from '../../../shared/api/vessels.ts';
import type { VoyageList } from '../../../shared/api/voyages.ts';
import { isUnderWay } from '../../../shared/rules/rotation.ts';
import { apiGet, apiSend } from '../../lib/api.ts';

/** What every step of a change makes stale: all that is known of the vessel. */
export const vesselKey = (vesselId: string) => ['vessels', vesselId] as const;

const at = (vesselId: string, rotationId: string) => `/vessels/${vesselId}/rotations/${rotationId}`;

/** Changes of the next six weeks, those under way, and the newest of the history. */
export const rotationsQuery = (vesselId: string) =>
  queryOptions({
    queryKey: ['vessels', vesselId, 'rotations', 'list'],
    queryFn: ({ signal }) =>
      apiGet<RotationList>(`/vessels/${vesselId}/rotations`, { query: { limit: 50 }, signal }),
    refetchInterval: 30_000,
  });

/** The calendar from a week back to seven weeks ahead of an instant. */
export const voyagesQuery = (vesselId: string) =>
  queryOptions({
    queryKey: ['vessels', vesselId, 'voyages', 'near'],
    queryFn: ({ signal }) => apiGet<VoyageList>(`/vessels/${vesselId}/voyages`, { signal }),
    staleTime: 60_000,
  });

/** One change, access point by access point; looked at again every few seconds while it is under way. */
export const rotationQuery = (vesselId: string, rotationId: string) =>
  queryOptions({
    queryKey: ['vessels', vesselId, 'rotations', 'one', rotationId],
    queryFn: ({ signal }) => apiGet<RotationView>(at(vesselId, rotationId), { signal }),
    refetchInterval: ({ state }) => (state.data && isUnderWay(state.data.state) ? 4_000 : 20_000),
  });

/** Who carries changes out aboard, and the access points they go to. */
export const carriedOutQuery = (vesselId: string) =>
  queryOptions({
    queryKey: ['vessels', vesselId, 'settings', 'carried out'],
    queryFn: async ({ signal }) => {
      const settings = await apiGet<VesselSettings>(`/vessels/${vesselId}/settings`, { signal });
      return { driver: settings.driver, accessPoints: settings.accessPoints.map(({ name }) => name) };
    },
    staleTime: 60_000,
  });

export const changeNow = (
  vesselId: string,
  networkId: string,
  wanted: { reason: ChangeReason; urgent: boolean },
) => apiSend<RotationView>('POST', `/vessels/${vesselId}/networks/${networkId}/rotations/now`, wanted);

export const planFor = (
  vesselId: string,
  networkId: string,
  wanted: { dueAt: string; reason: ChangeReason },
) => apiSend<RotationView>('POST', `/vessels/${vesselId}/networks/${networkId}/rotations`, wanted);

export const moveRotation = (vesselId: string, rotationId: string, dueAt: string) =>
  apiSend<RotationView>('POST', `${at(vesselId, rotationId)}/move`, { dueAt });

export const cancelRotation = (vesselId: string, rotationId: string) =>
  apiSend<{ cancelled: RotationView; next: RotationView | null }>(
    'POST',
    `${at(vesselId, rotationId)}/cancel`,
  );

export const giveUp = (vesselId: string, rotationId: string) =>
  apiSend<RotationView>('POST', `${at(vesselId, rotationId)}/give-up`);

export const goOn = (vesselId: string, rotationId: string) =>
  apiSend<RotationView>('POST', `${at(vesselId, rotationId)}/go-on`);

/** Opens the entry sheet; from then on the change is under way. The server writes it in the log first. */
export const openSheet = (vesselId: string, rotationId: string) =>
  apiSend<EntrySheet>('POST', `${at(vesselId, rotationId)}/sheet`);

const accessPoint = (vesselId: string, rotationId: string, accessPointId: string) =>
  `${at(vesselId, rotationId)}/access-points/${accessPointId}`;

export const confirmAccessPoint = (
  vesselId: string,
  rotationId: string,
  accessPointId: string,
  typed: string,
) => apiSend<RotationView>('POST', `${accessPoint(vesselId, rotationId, accessPointId)}/confirm`, { typed });

export const reportUnreachable = (
  vesselId: string,
  rotationId: string,
  accessPointId: string,
  note: string,
) =>
  apiSend<RotationView>(
    'POST',
    `${accessPoint(vesselId, rotationId, accessPointId)}/unreachable`,
    note ? { note } : {},
  );

export const reportDrift = (
  vesselId: string,
  rotationId: string,
  accessPointId: string,
  seen: 'old' | 'other',
) => apiSend<RotationView>('POST', `${accessPoint(vesselId, rotationId, accessPointId)}/drift`, { seen });

export const putRight = (vesselId: string, rotationId: string, accessPointId: string, typed: string) =>
  apiSend<RotationView>('POST', `${accessPoint(vesselId, rotationId, accessPointId)}/put-right`, { typed });
