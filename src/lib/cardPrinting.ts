import type { PrintBody } from '../../shared/api/cards.ts';
import type { CardFormat } from '../../shared/api/common.ts';
import { apiDownload } from './api.ts';

/** What a card can be printed as, for whoever chooses. */
export const CARD_FORMATS: readonly { value: CardFormat; label: string; hint: string }[] = [
  {
    value: 'wallet-sheet',
    label: 'Wallet cards, ten to an A4 sheet',
    hint: 'With cut marks; backs on the next page, turned on the long edge.',
  },
  {
    value: 'wallet',
    label: 'Wallet cards, one a page',
    hint: 'The size of a bank card, for a card printer.',
  },
  { value: 'cabin', label: 'Cabin cards', hint: 'A6, to stand in the cabin.' },
];

/** Prints cards and saves the PDF. Throws `ApiError` or `AwayError`; then no card counts as printed. */
export const printCards = (vesselId: string, networkId: string, body: PrintBody) =>
  apiDownload('POST', `/vessels/${vesselId}/networks/${networkId}/cards/print`, {
    body,
    fallbackName: 'join-cards.pdf',
  });
