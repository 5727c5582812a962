import type { Standing } from './fleet.ts';

const DAY_MS = 86_400_000;
/** From this share of its limit on a network is due (common practice, no source). */
const DUE_RATIO = 0.9;

/** Age of a passphrase in days of 24 hours. */
export const ageInDays = (liveAt: Date, now: Date): number =>
  Math.max(0, (now.getTime() - liveAt.getTime()) / DAY_MS);

export interface StandingFacts {
  /** Age of the live passphrase divided by its limit; null where none is on record. */
  readonly ratio: number | null;
  /** Departed holders of the live passphrase. */
  readonly departed: number;
  /** Its lost cards and reported leaks. */
  readonly leaks: number;
}

/**
 * A network's state at a glance. Exposed outweighs age; exactly at the limit is in time; a network without a
 * passphrase on record is due, because nothing vouches for it.
 */
export function standingOf({ ratio, departed, leaks }: StandingFacts): Standing {
  if (departed > 0 || leaks > 0) return 'exposed';
  if (ratio === null) return 'due';
  if (ratio > 1) return 'overdue';
  return ratio >= DUE_RATIO ? 'due' : 'in_order';
}
