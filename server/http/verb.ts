import type { Tx } from '../db/connection.ts';
import type { Services } from '../services.ts';
import type { Actor } from './session.ts';

/** What a verb of one vessel is given: the open transaction, who asks, and the instant that counts as now. */
export interface Verb {
  readonly services: Services;
  readonly tx: Tx;
  readonly actor: Actor;
  readonly now: Date;
}
