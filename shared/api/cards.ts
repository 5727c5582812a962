import { z } from 'zod';
import { PRINT_MAX } from '../rules/limits.ts';
import {
  audience,
  cardFormat,
  cardLanguage,
  id,
  instant,
  language,
  networkParams,
  pageQuery,
  security,
  vesselParams,
} from './common.ts';
import { contract, vessel } from './contract.ts';

const whoMayPrint = vessel('cards.print.guest', 'cards.print.crew', 'cards.print.owner');

const whoMayHandOver = vessel('handovers.guest', 'handovers.crew', 'handovers.owner');

export const cardState = z.enum(['printed', 'handed_over', 'returned', 'lost', 'void']);
export type CardState = z.infer<typeof cardState>;

/** Which passphrase a card carries; where it is left out, the one that is right for the person's own dates. */
export const whichPassphrase = z.enum(['live', 'staged']);

export const cardPreview = z.strictObject({
  vesselName: z.string(),
  audience,
  ssid: z.string(),
  security,
  hidden: z.boolean(),
  passphrase: z.string(),
  /** The passphrase cut where the eye may rest; joined they are the passphrase. */
  parts: z.array(z.string()),
  payload: z.string(),
  language: cardLanguage,
  /** In the card's language and ship's time: "From Sun 14 June, 11:00". */
  validFrom: z.string(),
  which: whichPassphrase,
  /** The network is being changed: the passphrase before may still be the one that works. */
  underWay: z.boolean(),
  /** The card this person would be handed; `id` null when the next serial would be given. */
  card: z.strictObject({ id: id.nullable(), serial: z.string(), printed: z.boolean() }),
  cautionDock: z.boolean(),
});
export type CardPreview = z.infer<typeof cardPreview>;

export const previewCard = contract({
  name: 'cards.preview',
  method: 'POST',
  path: '/vessels/:vesselId/networks/:networkId/cards/preview',
  summary: 'A join card as it would be printed; logged once a session and passphrase',
  access: whoMayPrint,
  secret: true,
  params: networkParams,
  body: z.strictObject({
    guestId: id.optional(),
    /** The guest's own language unless said; English where no card is printed in it. */
    language: cardLanguage.optional(),
    which: whichPassphrase.optional(),
  }),
  response: cardPreview,
});

/** The large code, for somebody in a hurry. */
export const shownCode = z.strictObject({
  handoverId: id,
  at: instant,
  /** The screen offers undo until then; the server allows a moment more. */
  undoUntil: instant,
  ssid: z.string(),
  security,
  hidden: z.boolean(),
  passphrase: z.string(),
  /** The passphrase cut where the eye may rest; joined they are the passphrase. */
  parts: z.array(z.string()),
  payload: z.string(),
  /** The guest's own. */
  language,
  /** In the language asked for and ship's time: "From Sun 14 June, 11:00". */
  validFrom: z.string(),
  which: whichPassphrase,
  underWay: z.boolean(),
  cautionDock: z.boolean(),
});
export type ShownCode = z.infer<typeof shownCode>;

export const showCode = contract({
  name: 'cards.show',
  method: 'POST',
  path: '/vessels/:vesselId/networks/:networkId/guests/:guestId/show',
  summary: "Show a guest the network's code on the screen; showing it is a handover in the log",
  access: whoMayHandOver,
  secret: true,
  params: networkParams.extend({ guestId: id }),
  body: z.strictObject({
    /** The guest's own unless said; English where no card is printed in it. */
    language: cardLanguage.optional(),
  }),
  response: shownCode,
});

export const printBody = z
  .strictObject({
    guestIds: z.array(id).max(PRINT_MAX).optional(),
    crewMemberIds: z.array(id).max(PRINT_MAX).optional(),
    /** Cards for nobody yet. */
    blanks: z
      .number('Give a whole number')
      .int('Give a whole number')
      .min(1, 'At least one card')
      .max(PRINT_MAX, `At most ${PRINT_MAX} cards at a time`)
      .optional(),
    format: cardFormat,
    /** For all of them; each person's own unless said, English for blanks. */
    language: cardLanguage.optional(),
    which: whichPassphrase.optional(),
    /** Leaves earlier cards printed for these people and not handed over good; otherwise they are void. */
    keepEarlier: z.boolean().default(false),
  })
  .refine(
    ({ guestIds, crewMemberIds, blanks }) =>
      [guestIds, crewMemberIds, blanks].filter((one) => one !== undefined).length === 1,
    { path: ['guestIds'], message: 'Choose guests, crew members or a number of blank cards' },
  )
  .refine(({ guestIds, crewMemberIds }) => guestIds?.length !== 0 && crewMemberIds?.length !== 0, {
    path: ['guestIds'],
    message: 'Choose at least one person',
  });
export type PrintBody = z.input<typeof printBody>;

export const printCards = contract({
  name: 'cards.print',
  method: 'POST',
  path: '/vessels/:vesselId/networks/:networkId/cards/print',
  summary: 'Print join cards as a PDF; if it cannot be made, no card counts as printed',
  access: whoMayPrint,
  secret: true,
  params: networkParams,
  body: printBody,
  response: 'pdf',
});

/** The same card again for the same person, in the same format and language, with a new serial. */
export const reprintCard = contract({
  name: 'cards.reprint',
  method: 'POST',
  path: '/vessels/:vesselId/cards/:cardId/reprint',
  summary:
    'Print a card again; the earlier one is void unless told otherwise; gone once its passphrase is retired',
  access: whoMayPrint,
  secret: true,
  params: vesselParams.extend({ cardId: id }),
  body: z.strictObject({
    format: cardFormat.optional(),
    /** Leaves the earlier card good. */
    keepEarlier: z.boolean().default(false),
  }),
  response: 'pdf',
});

export const cardView = z.strictObject({
  id,
  serial: z.string(),
  networkId: id,
  network: z.string(),
  audience,
  format: z.enum(['wallet', 'cabin']),
  language: cardLanguage,
  state: cardState,
  /** The person who was given it, or for whom it was printed. */
  person: z.strictObject({ kind: z.enum(['guest', 'crew']), id, name: z.string() }).nullable(),
  /** Which passphrase it carries. */
  carries: z.enum(['live', 'staged', 'retired']),
  printedAt: instant,
  handedOverAt: instant.nullable(),
  endedAt: instant.nullable(),
});
export type CardView = z.infer<typeof cardView>;

export const listCards = contract({
  name: 'cards.list',
  method: 'GET',
  path: '/vessels/:vesselId/cards',
  summary: 'Join cards, newest first, of the networks the person asking may print for',
  access: vessel('cards.view'),
  params: vesselParams,
  query: pageQuery.extend({ state: cardState.optional(), networkId: id.optional() }),
  response: z.strictObject({
    cards: z.array(cardView),
    after: z.string().nullable(),
    /** How many there are in each state, with the same network filter. */
    counts: z.strictObject({
      printed: z.number().int(),
      handed_over: z.number().int(),
      returned: z.number().int(),
      lost: z.number().int(),
      void: z.number().int(),
    }),
  }),
});

const cardParams = vesselParams.extend({ cardId: id });

export const voidCard = contract({
  name: 'cards.void',
  method: 'POST',
  path: '/vessels/:vesselId/cards/:cardId/void',
  summary: 'Make a printed card void: spoilt or torn up',
  access: whoMayPrint,
  params: cardParams,
  response: cardView,
});

export const returnCard = contract({
  name: 'cards.returned',
  method: 'POST',
  path: '/vessels/:vesselId/cards/:cardId/returned',
  summary: 'A card that was handed over came back',
  access: whoMayHandOver,
  params: cardParams,
  response: cardView,
});

export const loseCard = contract({
  name: 'cards.lost',
  method: 'POST',
  path: '/vessels/:vesselId/cards/:cardId/lost',
  summary: 'A card is lost: its network is exposed and its change moves up',
  access: whoMayHandOver,
  params: cardParams,
  response: z.strictObject({
    card: cardView,
    /** The change that now comes; null when the card's passphrase is not in force. */
    changeAt: instant.nullable(),
  }),
});
