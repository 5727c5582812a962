import { z } from 'zod';
import { audience, id, instant, vesselParams } from './common.ts';
import { contract, vessel } from './contract.ts';

/** One per audience: the network named decides which of them is needed. */
const handing = vessel('handovers.guest', 'handovers.crew', 'handovers.owner');

export const handoverAnswer = z.strictObject({
  handoverId: id,
  passphraseId: id,
  /** `staged` when the guest arrives after the change, so that it is the one to come. */
  which: z.enum(['live', 'staged']),
  at: instant,
  /** The screen offers undo until then; the server allows a moment more. */
  undoUntil: instant,
  /** True when this was done before; then `sentence` says so. */
  already: z.boolean(),
  sentence: z.string(),
});
export type HandoverAnswer = z.infer<typeof handoverAnswer>;

export const handOver = contract({
  name: 'handovers.create',
  method: 'POST',
  path: '/vessels/:vesselId/handovers',
  summary: "Write down that somebody was given a network's passphrase by card or on a screen",
  access: handing,
  params: vesselParams,
  body: z
    .strictObject({
      guestId: id.optional(),
      crewMemberId: id.optional(),
      networkId: id,
      channel: z.enum(['card', 'screen'], 'Say whether by card or by screen'),
      /** The card in hand; where it is left out, the one printed for this person. */
      cardId: id.nullable().default(null),
    })
    .refine((body) => (body.guestId === undefined) !== (body.crewMemberId === undefined), {
      path: ['guestId'],
      message: 'Say which guest or which crew member it is for',
    }),
  response: handoverAnswer,
  status: 201,
});

export const undoHandover = contract({
  name: 'handovers.undo',
  method: 'POST',
  path: '/vessels/:vesselId/handovers/:handoverId/undo',
  summary: 'Take back a handover of the last seconds',
  access: handing,
  params: z.strictObject({ vesselId: id, handoverId: id }),
  response: z.strictObject({ handoverId: id, undoneAt: instant }),
});

export const holderView = z.strictObject({
  kind: z.enum(['guest', 'crew', 'person']),
  id,
  /** Null when withheld or erased. */
  name: z.string().nullable(),
  /** Stands for a guest without a name: "Guest 8". */
  label: z.string().nullable(),
  since: instant,
  through: z.enum(['card', 'screen', 'own_page', 'reveal', 'entry_sheet', 'typed']),
  departedAt: instant.nullable(),
});
export type HolderView = z.infer<typeof holderView>;

export const holdersView = z.strictObject({
  zone: z.string(),
  networks: z.array(
    z.strictObject({
      id,
      ssid: z.string(),
      audience,
      /** When the passphrase in force came into force; null where none is recorded. */
      since: instant.nullable(),
      /** The departed first; null where the person asking sees the count only: the owner's network. */
      holders: z.array(holderView).nullable(),
      current: z.number().int(),
      departed: z.number().int(),
      /** Lost cards and reported leaks of the passphrase in force. */
      leaks: z.array(z.strictObject({ kind: z.enum(['lost_card', 'reported']), at: instant })),
    }),
  ),
});
export type HoldersView = z.infer<typeof holdersView>;

export const listHolders = contract({
  name: 'holders.list',
  method: 'GET',
  path: '/vessels/:vesselId/holders',
  summary: "Who holds each network's passphrase in force, and who of them has left",
  access: vessel('log.view'),
  params: vesselParams,
  response: holdersView,
});
