import { queryOptions } from '@tanstack/react-query';
import type {
  ArrivalsView,
  GuestView,
  ListPreview,
  PartyForm,
  PartyView,
} from '../../../shared/api/arrivals.ts';
import type { CardPreview, CardView, ShownCode } from '../../../shared/api/cards.ts';
import type { CardLanguage, Language, Source } from '../../../shared/api/common.ts';
import type { HandoverAnswer } from '../../../shared/api/handovers.ts';
import { apiGet, apiSend } from '../../lib/api.ts';

/** The arrivals screen of a vessel: the party asked for, or the one aboard or next. */
export const arrivalsQuery = (vesselId: string, partyId: string | null = null) =>
  queryOptions({
    queryKey: ['vessels', vesselId, 'arrivals', partyId],
    queryFn: ({ signal }) =>
      apiGet<ArrivalsView>(`/vessels/${vesselId}/arrivals`, { query: { partyId }, signal }),
    refetchInterval: 15_000,
  });

/** What every change on this screen makes stale. */
export const arrivalsKey = (vesselId: string) => ['vessels', vesselId, 'arrivals'] as const;

export interface HandingOver {
  guestId: string;
  networkId: string;
  /** The card in hand; null for the one printed for this person. */
  cardId: string | null;
}

/** Writes down that a printed card was handed over. */
export const handOverCard = (vesselId: string, given: HandingOver) =>
  apiSend<HandoverAnswer>('POST', `/vessels/${vesselId}/handovers`, { ...given, channel: 'card' });

export const undoHandover = (vesselId: string, handoverId: string) =>
  apiSend('POST', `/vessels/${vesselId}/handovers/${handoverId}/undo`);

/** The card as it would be printed, passphrase and all; the server writes it in the log. */
export const previewCard = (
  vesselId: string,
  networkId: string,
  given: { guestId: string; language: CardLanguage },
) => apiSend<CardPreview>('POST', `/vessels/${vesselId}/networks/${networkId}/cards/preview`, given);

/** The code to show a guest; showing it is a handover, which the server writes in the log first. */
export const showCode = (vesselId: string, networkId: string, guestId: string, language: CardLanguage) =>
  apiSend<ShownCode>('POST', `/vessels/${vesselId}/networks/${networkId}/guests/${guestId}/show`, {
    language,
  });

export interface NewVisitor {
  name: string | null;
  language: Language;
  under16: boolean;
  untilAt: string;
}
export const addVisitor = (vesselId: string, visitor: NewVisitor) =>
  apiSend<GuestView>('POST', `/vessels/${vesselId}/visitors`, visitor);

export interface GuestChange {
  name: string | null;
  cabinId: string | null;
  language: Language;
  under16: boolean;
}
export const addGuest = (vesselId: string, partyId: string, guest: GuestChange) =>
  apiSend<GuestView>('POST', `/vessels/${vesselId}/guests`, { ...guest, partyId });
export const changeGuest = (vesselId: string, guestId: string, guest: GuestChange) =>
  apiSend<GuestView>('PATCH', `/vessels/${vesselId}/guests/${guestId}`, guest);
export const removeGuest = (vesselId: string, guestId: string) =>
  apiSend('DELETE', `/vessels/${vesselId}/guests/${guestId}`);
export const eraseGuest = (vesselId: string, guestId: string) =>
  apiSend<GuestView>('POST', `/vessels/${vesselId}/guests/${guestId}/erase`);

export const guestAshore = (vesselId: string, guestId: string) =>
  apiSend<GuestView>('POST', `/vessels/${vesselId}/guests/${guestId}/ashore`);
export const guestBack = (vesselId: string, guestId: string) =>
  apiSend<GuestView>('POST', `/vessels/${vesselId}/guests/${guestId}/back`);

export interface CardOutcome {
  cardId: string;
  state: 'returned' | 'lost' | 'kept';
}
export interface PartyGone {
  party: PartyView;
  exposed: { networkId: string; ssid: string; changeAt: string | null }[];
  lostCards: number;
}
export const partyAshore = (vesselId: string, partyId: string, cards: CardOutcome[]) =>
  apiSend<PartyGone>('POST', `/vessels/${vesselId}/parties/${partyId}/ashore`, { cards });

/** Cards that are in people's hands. */
export const cardsOutQuery = (vesselId: string) =>
  queryOptions({
    queryKey: ['vessels', vesselId, 'arrivals', 'cards out'],
    queryFn: ({ signal }) =>
      apiGet<{ cards: CardView[] }>(`/vessels/${vesselId}/cards`, {
        query: { state: 'handed_over', limit: 100 },
        signal,
      }),
    staleTime: 0,
  });

export const saveParty = (vesselId: string, partyId: string | null, party: PartyForm) =>
  partyId === null
    ? apiSend<PartyView>('POST', `/vessels/${vesselId}/parties`, party)
    : apiSend<PartyView>('PATCH', `/vessels/${vesselId}/parties/${partyId}`, party);

/** Reads a list without keeping anything of it. */
export const previewList = (
  vesselId: string,
  list: { base64: string; dateOrder?: 'day_first' | 'month_first' },
) => apiSend<ListPreview>('POST', `/vessels/${vesselId}/arrivals/preview`, list);

export interface ListToAdd {
  partyId?: string;
  newParty?: PartyForm;
  rows: unknown[];
}
export const importList = (vesselId: string, list: ListToAdd) =>
  apiSend<{ partyId: string; added: number }>('POST', `/vessels/${vesselId}/arrivals/import`, list);

/** Says what feeds the boat just now; cautions and the head of every page follow. */
export const changeSource = (vesselId: string, source: Source) =>
  apiSend('PUT', `/vessels/${vesselId}/source`, { source });
