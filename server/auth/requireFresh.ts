import { AppError } from '../errors.ts';
import { FRESH_MS } from '../http/session.ts';
import type { Verb } from '../http/verb.ts';

/** Asks for a fresh proof of identity where a route only sometimes needs one. Throws `step_up`. */
export function requireFresh({ actor, now }: Pick<Verb, 'actor' | 'now'>): void {
  if (now.getTime() - actor.provedAt.getTime() > FRESH_MS) {
    throw new AppError('step_up', 'Please confirm it is you, then this goes through.');
  }
}
