import { z } from 'zod';
import { CSV_MAX_BYTES, CSV_MAX_ROWS, LIST_MAX_BYTES, NAME_MAX } from '../rules/limits.ts';
import { id, instant, language, nameText, vesselParams } from './common.ts';
import { contract, vessel } from './contract.ts';

const viewing = vessel('arrivals.view');
const editing = vessel('arrivals.edit');
const guestParams = z.strictObject({ vesselId: id, guestId: id });
const partyParams = z.strictObject({ vesselId: id, partyId: id });

export const partyView = z.strictObject({
  id,
  name: z.string(),
  arrivesAt: instant,
  leavesAt: instant,
  /** When the whole party was marked ashore. */
  ashoreAt: instant.nullable(),
  /** Guests on its list. */
  count: z.number().int(),
});
export type PartyView = z.infer<typeof partyView>;

/** A guest or a visitor, with what they were given of the chosen network's passphrase. */
export const guestView = z.strictObject({
  id,
  partyId: id.nullable(),
  cabin: z.strictObject({ id, name: z.string(), deck: z.string() }).nullable(),
  /** Null when withheld or erased; the label ("Guest 8") is always there. */
  name: z.string().nullable(),
  label: z.string(),
  language,
  under16: z.boolean(),
  fromAt: instant,
  untilAt: instant,
  ashoreAt: instant.nullable(),
  erasedAt: instant.nullable(),
  /** The latest handover of the passphrase this guest should have: staged when they arrive after the change. */
  handover: z
    .strictObject({ id, channel: z.enum(['card', 'screen']), serial: z.string().nullable(), at: instant })
    .nullable(),
  /** A card printed for this guest with that passphrase and not handed over yet. */
  printedCard: z.strictObject({ id, serial: z.string() }).nullable(),
});
export type GuestView = z.infer<typeof guestView>;

export const arrivalsView = z.strictObject({
  /** The server's instant, for "aboard now". */
  at: instant,
  /** IANA zone of ship's time in force now. */
  zone: z.string(),
  vesselName: z.string(),
  /** Parties aboard, expected or lately gone, earliest arrival first. */
  parties: z.array(partyView),
  /** The party asked for, or the one aboard, or the next, or the last. */
  party: partyView.nullable(),
  guests: z.array(guestView),
  /** Visitors of today and to come: people on no party's list. */
  visitors: z.array(guestView),
  /** Cabins in deck order, for placing guests. */
  cabins: z.array(z.strictObject({ id, name: z.string(), deck: z.string() })),
  /** Guest networks that could be handed out. */
  networks: z.array(z.strictObject({ id, ssid: z.string() })),
  /** The one the handovers below are about. */
  network: z
    .strictObject({
      id,
      ssid: z.string(),
      live: z.strictObject({ passphraseId: id, since: instant }).nullable(),
      /** A change with its passphrase made already; guests who arrive from then on get that one. */
      staged: z.strictObject({ passphraseId: id, from: instant }).nullable(),
    })
    .nullable(),
  /** True at the dock: advise against banking on the shared network. */
  dockCaution: z.boolean(),
});
export type ArrivalsView = z.infer<typeof arrivalsView>;

const guestName = nameText(NAME_MAX).nullable();

/** One line of a list as a person confirmed it. Null times are the party's. */
export const guestRow = z.strictObject({
  /** Null when withheld. */
  name: guestName,
  cabinId: id.nullable().default(null),
  language: language.default('en'),
  under16: z.boolean().default(false),
  fromAt: instant.nullable().default(null),
  untilAt: instant.nullable().default(null),
});

const partyForm = z.strictObject({
  name: nameText(NAME_MAX),
  arrivesAt: instant,
  leavesAt: instant,
  voyageId: id.nullable().default(null),
});
export type PartyForm = z.input<typeof partyForm>;

/** Day before month, month before day, or a person has to say. */
export const dateOrder = z.enum(['day_first', 'month_first']);

export const listPreview = z.strictObject({
  /** What would be added, in the list's order. `line` counts from 1, headings included. */
  rows: z.array(guestRow.extend({ line: z.number().int(), notes: z.array(z.string()) })),
  /** Lines left out, each with the field and what would be right. */
  wrong: z.array(z.strictObject({ line: z.number().int(), field: z.string(), sentence: z.string() })),
  /** What each used column was taken for, in column order. */
  columns: z.array(z.string()),
  /** Columns not used; what is in them is neither kept nor shown. */
  leftOut: z.number().int(),
  encoding: z.enum(['UTF-8', 'UTF-16', 'Latin-1']),
  /** How day and month were told apart; `ask` when the list does not say, null when no date needed it. */
  dates: z.union([dateOrder, z.literal('ask')]).nullable(),
});
export type ListPreview = z.infer<typeof listPreview>;

export const readArrivals = contract({
  name: 'arrivals.read',
  method: 'GET',
  path: '/vessels/:vesselId/arrivals',
  summary: 'The arrivals screen: a party by cabin, visitors, and who has been given what',
  access: viewing,
  params: vesselParams,
  query: z.strictObject({ partyId: id.optional(), networkId: id.optional() }),
  response: arrivalsView,
});

export const previewList = contract({
  name: 'arrivals.preview',
  method: 'POST',
  path: '/vessels/:vesselId/arrivals/preview',
  summary: "Read a party's list without keeping anything of it",
  access: editing,
  // Not for a passphrase: a list that is only looked at is not kept for repeats either.
  secret: true,
  bodyMax: LIST_MAX_BYTES,
  params: vesselParams,
  body: z
    .strictObject({
      text: z.string().max(CSV_MAX_BYTES, 'Send at most 2 MB').optional(),
      /** The file as it is: UTF-8, UTF-16 or Latin-1, at most 2 MB. */
      base64: z
        .string()
        .max(Math.ceil(CSV_MAX_BYTES / 3) * 4, 'Send at most 2 MB')
        .regex(/^[A-Za-z0-9+/]*={0,2}$/, 'Send the file in base64')
        .optional(),
      /** A person's answer where the list does not say which of day and month comes first. */
      dateOrder: dateOrder.optional(),
      /** The party's times: its own days, given without a time of day, then mean these. */
      arrivesAt: instant.optional(),
      leavesAt: instant.optional(),
    })
    .refine((body) => (body.text === undefined) !== (body.base64 === undefined), {
      path: ['text'],
      message: 'Send the list as text, or the file in base64',
    }),
  response: listPreview,
});

export const importList = contract({
  name: 'arrivals.import',
  method: 'POST',
  path: '/vessels/:vesselId/arrivals/import',
  summary: 'Add the confirmed lines of a list to a party, or to a new one',
  access: editing,
  bodyMax: LIST_MAX_BYTES,
  params: vesselParams,
  body: z
    .strictObject({
      partyId: id.optional(),
      newParty: partyForm.optional(),
      rows: z
        .array(guestRow)
        .min(1, 'There is nothing to add')
        .max(CSV_MAX_ROWS, `Add at most ${CSV_MAX_ROWS} guests at a time`),
    })
    .refine((body) => (body.partyId === undefined) !== (body.newParty === undefined), {
      path: ['partyId'],
      message: 'Choose the party, or give a new one its name and times',
    }),
  response: z.strictObject({ partyId: id, added: z.number().int() }),
  status: 201,
});

export const addGuest = contract({
  name: 'arrivals.addGuest',
  method: 'POST',
  path: '/vessels/:vesselId/guests',
  summary: "Add one guest to a party's list",
  access: editing,
  params: vesselParams,
  body: guestRow.extend({ partyId: id }),
  response: guestView,
  status: 201,
});

export const editGuest = contract({
  name: 'arrivals.editGuest',
  method: 'PATCH',
  path: '/vessels/:vesselId/guests/:guestId',
  summary: "Correct a guest's entry",
  access: editing,
  params: guestParams,
  body: z.strictObject({
    name: guestName.optional(),
    cabinId: id.nullable().optional(),
    language: language.optional(),
    under16: z.boolean().optional(),
    fromAt: instant.optional(),
    untilAt: instant.optional(),
  }),
  response: guestView,
});

export const removeGuest = contract({
  name: 'arrivals.removeGuest',
  method: 'DELETE',
  path: '/vessels/:vesselId/guests/:guestId',
  summary: 'Take a guest who was given nothing off the list',
  access: editing,
  params: guestParams,
  response: z.strictObject({ id }),
});

export const addVisitor = contract({
  name: 'arrivals.addVisitor',
  method: 'POST',
  path: '/vessels/:vesselId/visitors',
  summary: 'Add somebody who is not on the list, with an end time',
  access: editing,
  params: vesselParams,
  body: z.strictObject({
    name: guestName,
    language: language.default('en'),
    under16: z.boolean().default(false),
    /** From now unless given. */
    fromAt: instant.nullable().default(null),
    untilAt: instant,
  }),
  response: guestView,
  status: 201,
});

export const guestAshore = contract({
  name: 'arrivals.guestAshore',
  method: 'POST',
  path: '/vessels/:vesselId/guests/:guestId/ashore',
  summary: 'Mark a guest as gone; what they hold is exposed from now on',
  access: editing,
  params: guestParams,
  response: guestView,
});

export const guestBack = contract({
  name: 'arrivals.guestBack',
  method: 'POST',
  path: '/vessels/:vesselId/guests/:guestId/back',
  summary: 'Mark a guest as aboard again',
  access: editing,
  params: guestParams,
  response: guestView,
});

export const eraseGuest = contract({
  name: 'arrivals.eraseGuest',
  method: 'POST',
  path: '/vessels/:vesselId/guests/:guestId/erase',
  summary: "Erase a guest's name here and in the log, for good",
  access: editing,
  params: guestParams,
  response: guestView,
});

export const createParty = contract({
  name: 'arrivals.createParty',
  method: 'POST',
  path: '/vessels/:vesselId/parties',
  summary: 'Add a party; planned changes follow its dates',
  access: editing,
  params: vesselParams,
  body: partyForm,
  response: partyView,
  status: 201,
});

export const editParty = contract({
  name: 'arrivals.editParty',
  method: 'PATCH',
  path: '/vessels/:vesselId/parties/:partyId',
  summary: "Correct a party; its guests' times move where they were the party's",
  access: editing,
  params: partyParams,
  body: z.strictObject({
    name: nameText(NAME_MAX).optional(),
    arrivesAt: instant.optional(),
    leavesAt: instant.optional(),
    voyageId: id.nullable().optional(),
  }),
  response: partyView,
});

/** What became of a card when its party left. */
export const cardOutcome = z.enum(['returned', 'lost', 'kept']);

export const partyAshore = contract({
  name: 'arrivals.partyAshore',
  method: 'POST',
  path: '/vessels/:vesselId/parties/:partyId/ashore',
  summary: 'Mark the whole party as gone, with what became of its cards',
  access: editing,
  params: partyParams,
  body: z.strictObject({
    cards: z
      .array(z.strictObject({ cardId: id, state: cardOutcome }))
      .max(1000)
      .default([]),
  }),
  response: z.strictObject({
    party: partyView,
    /** Networks exposed by this, with the change planned for each. */
    exposed: z.array(z.strictObject({ networkId: id, ssid: z.string(), changeAt: instant.nullable() })),
    lostCards: z.number().int(),
  }),
});
