import type { VoyageForm, VoyageView } from '../../../shared/api/voyages.ts';
import { apiSend } from '../../lib/api.ts';
import { queryClient } from '../../lib/queryClient.ts';

/** Every network's plan follows the calendar, so all that is known of the vessel is looked at again. */
const again = (vesselId: string) => queryClient.invalidateQueries({ queryKey: ['vessels', vesselId] });

/** Adds a stretch to the calendar (`voyageId` null) or changes one. Fails with fields when its times cannot be. */
export async function saveVoyage(vesselId: string, voyageId: string | null, voyage: VoyageForm) {
  const saved =
    voyageId === null
      ? await apiSend<VoyageView>('POST', `/vessels/${vesselId}/voyages`, voyage)
      : await apiSend<VoyageView>('PATCH', `/vessels/${vesselId}/voyages/${voyageId}`, voyage);
  await again(vesselId);
  return saved;
}

/** Takes a stretch off the calendar; its parties stay. */
export async function removeVoyage(vesselId: string, voyageId: string) {
  await apiSend('DELETE', `/vessels/${vesselId}/voyages/${voyageId}`);
  await again(vesselId);
}
