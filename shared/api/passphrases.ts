import { z } from 'zod';
import { PASSPHRASE_MAX, TYPED_MAX } from '../rules/limits.ts';
import { checkPassphrase } from '../rules/passphrase.ts';
import { id, instant, networkParams, security } from './common.ts';
import { contract, vessel } from './contract.ts';
import { networkView } from './networks.ts';

const typed = z
  .string()
  .max(TYPED_MAX, `A passphrase has at most ${PASSPHRASE_MAX} characters`)
  .superRefine((text, context) => {
    const checked = checkPassphrase(text);
    if (!checked.ok) context.addIssue({ code: 'custom', message: checked.reason });
  });

export const passphraseVerdict = z.strictObject({
  grade: z.enum(['weak', 'fair', 'strong']),
  /** "about 3 hours for someone who recorded one phone joining" */
  words: z.string(),
  why: z.string(),
  /** What may trip some phones when they read it from a code, each a sentence. */
  cautions: z.array(z.string()),
});

export type PassphraseVerdict = z.infer<typeof passphraseVerdict>;

export const checkTyped = contract({
  name: 'passphrases.check',
  method: 'POST',
  path: '/vessels/:vesselId/networks/:networkId/passphrase/check',
  summary: 'Judge a passphrase without keeping it',
  access: vessel('passphrase.type'),
  secret: true,
  params: networkParams,
  body: z.strictObject({ passphrase: typed }),
  response: passphraseVerdict,
});

export const typeIn = contract({
  name: 'passphrases.typeIn',
  method: 'POST',
  path: '/vessels/:vesselId/networks/:networkId/passphrase',
  summary: 'Type in the passphrase in force today; a weak one is taken and flagged',
  access: vessel('passphrase.type'),
  fresh: true,
  secret: true,
  params: networkParams,
  body: z.strictObject({
    passphrase: typed,
    /** Since when it is in force, where that is known; else its age counts from now. */
    since: instant.nullable().default(null),
  }),
  response: z.strictObject({ network: networkView, verdict: passphraseVerdict }),
  status: 201,
});

/** One passphrase that may work, in the order to try them. */
export const revealedCode = z.strictObject({
  passphraseId: id,
  role: z.enum(['in_force', 'new', 'old', 'staged']),
  /** "In force", "From Sunday 03:00", "Try this first": a sentence for whoever reads it. */
  words: z.string(),
  passphrase: z.string(),
  /** The standard Wi-Fi payload for a QR code. */
  payload: z.string(),
  since: instant.nullable(),
});

export const revealed = z.strictObject({
  ssid: z.string(),
  security,
  hidden: z.boolean(),
  codes: z.array(revealedCode),
});
export type Revealed = z.infer<typeof revealed>;

export const reveal = contract({
  name: 'passphrases.reveal',
  method: 'POST',
  path: '/vessels/:vesselId/networks/:networkId/reveal',
  summary: 'Show the passphrases that may work now, in the order to try them; written in the log first',
  access: vessel('passphrase.reveal.owner', 'passphrase.reveal.guest', 'passphrase.reveal.crew'),
  secret: true,
  params: networkParams,
  response: revealed,
});
