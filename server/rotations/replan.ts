import type { Tx } from '../db/connection.ts';
import type { Services } from '../services.ts';

/** What the plan says after a look at a network. */
export interface Replanned {
  readonly rotationId: string;
  readonly dueAt: Date;
  /** True when this call set or moved the change. */
  readonly changed: boolean;
}

/**
 * Looks at a network's plan again after something happened (a leak, a departure, a sign-off, a new policy or
 * calendar) and sets or moves its planned change inside the caller's transaction. Answers null when there is
 * nothing to plan: the network is removed, has no passphrase in force, or its change is already under way.
 * An exposure never moves a change later, and a staged change is only ever moved earlier.
 */
export async function replanNetwork(
  _services: Services,
  _tx: Tx,
  _networkId: string,
  _now: Date,
): Promise<Replanned | null> {
  return null;
}
