import type { RotationView } from '../../shared/api/rotations.ts';
import { AppError } from '../errors.ts';
import { faultPoint } from '../faultPoint.ts';
import { type Actor, sameText } from '../http/session.ts';
import type { Verb } from '../http/verb.ts';
import { openPassphrase } from '../passphrases/sealPassphrase.ts';
import type { Services } from '../services.ts';
import { byActor } from './by.ts';
import { lockRotation } from './lockRotation.ts';
import { observe, personReporter } from './observe.ts';
import { viewRotation } from './present.ts';

/** Tries at typing a passphrase back, per person and change, in a minute. Common practice, no source. */
const TRIES = 10;
const TRIES_MS = 60_000;

/**
 * Counts a try before anything is compared, in a transaction of its own so that a wrong one counts too.
 * Throws `too_many` with the seconds to wait.
 */
export async function countTry(services: Services, actor: Actor, rotationId: string): Promise<void> {
  const now = services.clock.now();
  const [row] = await services.db.transaction({ kind: 'none' }, (tx) =>
    services.db.run<{ failures: number; window_from: Date }>(
      tx,
      `INSERT INTO throttles AS t (key, failures, window_from) VALUES ($key, 1, $now)
       ON CONFLICT (key) DO UPDATE SET
         failures = CASE WHEN t.window_from <= $since OR t.window_from > $now THEN 1 ELSE t.failures + 1 END,
         window_from = CASE WHEN t.window_from <= $since OR t.window_from > $now THEN $now ELSE t.window_from END
       RETURNING failures, window_from`,
      { key: `typed-back ${actor.personId} ${rotationId}`, now, since: new Date(now.getTime() - TRIES_MS) },
    ),
  );
  if (row && row.failures > TRIES) {
    const seconds = Math.max(1, Math.ceil((row.window_from.getTime() + TRIES_MS - now.getTime()) / 1000));
    throw new AppError(
      'too_many',
      `That was ${TRIES} tries in a minute. Wait a moment, then look at the sheet again.`,
      {
        retryAfter: seconds,
      },
    );
  }
}

/** What a wrong typed-back passphrase is told: how its length differs, and nothing more. */
export function differenceInLength(typed: string, right: string): string {
  const difference = [...typed].length - [...right].length;
  if (difference === 0)
    return 'The length is right, but something differs. Look at the sheet and type it again.';
  const count = Math.abs(difference);
  return `That is ${count} ${count === 1 ? 'character' : 'characters'} ${difference < 0 ? 'shorter' : 'longer'} than it should be.`;
}

/** Throws `invalid` about the field `typed` unless it is the passphrase, to the character. */
export async function requireTypedBack(
  { services, tx }: Verb,
  passphraseId: string,
  typed: string,
): Promise<void> {
  const right = await openPassphrase(services, tx, passphraseId);
  if (sameText(typed, right)) return;
  const sentence = differenceInLength(typed, right);
  throw new AppError('invalid', sentence, { errors: { typed: [sentence] } });
}

/**
 * Confirms one access point by the passphrase typed back without seeing it, which catches the typing error that
 * would lock everyone out. When it is the last one, the new passphrase comes into force in this transaction.
 */
export async function confirmAccessPoint(
  context: Verb,
  rotationId: string,
  accessPointId: string,
  typed: string,
): Promise<RotationView> {
  const { services, tx, actor, now } = context;
  const known = await lockRotation(services, tx, actor.vesselId ?? '', rotationId);
  const { ticket, to, handedOutAt, targets } = known.rotation;
  if (!targets.some((target) => target.accessPointId === accessPointId)) {
    throw new AppError('not_found', 'There is nothing here, or it is not yours to see.');
  }
  if (ticket === null || to === null || handedOutAt === null) {
    throw new AppError('not_now', 'Open the entry sheet first, enter the passphrase, then confirm it here.');
  }
  await requireTypedBack(context, to, typed);
  const reporter = await personReporter(services, tx, known, actor.personId);
  await observe(
    services,
    tx,
    known,
    ticket,
    { accessPointId, seen: 'new', evidence: 'E2' },
    reporter,
    byActor(context),
  );
  faultPoint('S9');
  return viewRotation(services, tx, actor, rotationId, now);
}
