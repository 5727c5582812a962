import * as api from '../../shared/api/cards.ts';
import { type Endpoint, endpoint } from '../http/endpoint.ts';
import { listCards, viewCard } from './listCards.ts';
import { previewCard } from './previewCard.ts';
import { printCards, reprintCard } from './printCards.ts';
import { loseCard, returnCard, voidCard } from './settleCard.ts';
import { showCode } from './showCode.ts';

export const cardRoutes: readonly Endpoint[] = [
  endpoint(api.previewCard, {
    handle: (context) => previewCard(context, context.params.networkId, context.body),
  }),
  endpoint(api.showCode, {
    handle: (context) =>
      showCode(context, context.params.networkId, context.params.guestId, context.body.language),
  }),
  endpoint(api.printCards, {
    handle: (context) => printCards(context, context.params.networkId, context.body),
  }),
  endpoint(api.reprintCard, {
    handle: (context) => reprintCard(context, context.params.cardId, context.body),
  }),
  endpoint(api.listCards, { handle: (context) => listCards(context, context.query) }),
  endpoint(api.voidCard, {
    handle: async (context) => {
      await voidCard(context, context.params.cardId);
      return viewCard(context, context.params.cardId);
    },
  }),
  endpoint(api.returnCard, {
    handle: async (context) => {
      await returnCard(context, context.params.cardId);
      return viewCard(context, context.params.cardId);
    },
  }),
  endpoint(api.loseCard, {
    handle: async (context) => {
      const changeAt = await loseCard(context, context.params.cardId);
      return {
        card: await viewCard(context, context.params.cardId),
        changeAt: changeAt?.toISOString() ?? null,
      };
    },
  }),
];
