import { z } from 'zod';
import { dealerRole, id, instant, language, vesselRole } from './common.ts';
import { contract, person } from './contract.ts';

export const sessionView = z.strictObject({
  person: z.strictObject({ id, name: z.string(), email: z.string(), locale: language }),
  /** Sent back in the `X-Quayword-CSRF` header of every request that changes something. */
  csrf: z.string(),
  memberships: z.array(z.strictObject({ vesselId: id, vesselName: z.string(), roles: z.array(vesselRole) })),
  dealer: z.strictObject({ id, name: z.string(), role: dealerRole }).nullable(),
  secondFactor: z.strictObject({ enrolled: z.boolean(), required: z.boolean() }),
  /** When this session last proved who it is (sign-in or confirmation). */
  provedAt: instant,
});
export type SessionView = z.infer<typeof sessionView>;

export const readSession = contract({
  name: 'session.read',
  method: 'GET',
  path: '/session',
  summary: 'Who is signed in, with which roles',
  access: person,
  response: sessionView,
});
