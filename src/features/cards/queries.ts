import { infiniteQueryOptions, queryOptions } from '@tanstack/react-query';
import type { ArrivalsView } from '../../../shared/api/arrivals.ts';
import type { CardState, CardView } from '../../../shared/api/cards.ts';
import type { CrewView } from '../../../shared/api/crew.ts';
import type { NetworkView } from '../../../shared/api/networks.ts';
import { apiGet, apiSend } from '../../lib/api.ts';

export interface CardPage {
  cards: CardView[];
  after: string | null;
  counts: Record<CardState, number>;
}

export interface CardWish {
  state: CardState | '';
  networkId: string;
}

/** Join cards, newest first, page by page. */
export const cardsQuery = (vesselId: string, wish: CardWish) =>
  infiniteQueryOptions({
    queryKey: ['vessels', vesselId, 'cards', wish],
    queryFn: ({ signal, pageParam }) =>
      apiGet<CardPage>(`/vessels/${vesselId}/cards`, { query: { ...wish, after: pageParam }, signal }),
    initialPageParam: null as string | null,
    getNextPageParam: ({ after }) => after,
  });

/** The networks cards can be printed for. */
export const printableNetworksQuery = (vesselId: string) =>
  queryOptions({
    queryKey: ['vessels', vesselId, 'networks'],
    queryFn: ({ signal }) =>
      apiGet<{ networks: NetworkView[]; crossingUntil: string | null }>(`/vessels/${vesselId}/networks`, {
        signal,
      }),
  });

/** The party aboard or next, to print for. */
export const partyToPrintQuery = (vesselId: string) =>
  queryOptions({
    queryKey: ['vessels', vesselId, 'arrivals', null],
    queryFn: ({ signal }) => apiGet<ArrivalsView>(`/vessels/${vesselId}/arrivals`, { signal }),
  });

/** The crew aboard, to print for. */
export const crewToPrintQuery = (vesselId: string) =>
  queryOptions({
    queryKey: ['vessels', vesselId, 'crew'],
    queryFn: ({ signal }) =>
      apiGet<{ aboard: CrewView[]; signedOff: CrewView[] }>(`/vessels/${vesselId}/crew`, { signal }),
  });

export const voidCard = (vesselId: string, cardId: string) =>
  apiSend<CardView>('POST', `/vessels/${vesselId}/cards/${cardId}/void`);
export const returnCard = (vesselId: string, cardId: string) =>
  apiSend<CardView>('POST', `/vessels/${vesselId}/cards/${cardId}/returned`);
export const loseCard = (vesselId: string, cardId: string) =>
  apiSend<{ card: CardView; changeAt: string | null }>('POST', `/vessels/${vesselId}/cards/${cardId}/lost`);
