import type { Verb } from '../http/verb.ts';

/** When something is done, and by whom. */
export interface By {
  readonly now: Date;
  /** Null for the clock and for the boat's own reports. */
  readonly actor: { readonly id: string; readonly name: string } | null;
}

/** A signed-in person's own doing. */
export const byActor = ({ actor, now }: Pick<Verb, 'actor' | 'now'>): By => ({
  now,
  actor: { id: actor.personId, name: actor.name },
});
