import { isIPv6 } from 'node:net';
import { AppError } from '../errors.ts';
import type { Services } from '../services.ts';

/** What failures are counted by, with how many are free before each further one waits longer. */
interface Limit {
  readonly key: string;
  readonly free: number;
}

const WINDOW_MS = 15 * 60_000;
const FIRST_WAIT_MS = 2_000;
const LONGEST_WAIT_MS = 15 * 60_000;

/** One subscriber's address: an IPv6 network of 64 bits is theirs alone (RFC 6177), so it counts as one. */
function network(address: string): string {
  const mapped = /^::ffff:(\d+\.\d+\.\d+\.\d+)$/i.exec(address);
  if (mapped?.[1]) return mapped[1];
  if (!isIPv6(address)) return address;
  const [head = '', tail] = address.split('%')[0]?.split('::') ?? [];
  const left = head === '' ? [] : head.split(':');
  const right = tail === undefined || tail === '' ? [] : tail.split(':');
  const zeros = Array.from({ length: Math.max(0, 8 - left.length - right.length) }, () => '0');
  return [...left, ...(tail === undefined ? [] : zeros), ...right]
    .slice(0, 4)
    .map((part) => Number.parseInt(part, 16).toString(16))
    .join(':');
}

/** Milliseconds to wait after this many failures: none while they are free, then doubling up to a quarter of an hour. */
export function waitAfter(failures: number, free: number): number {
  if (failures < free) return 0;
  return Math.min(LONGEST_WAIT_MS, FIRST_WAIT_MS * 2 ** Math.min(20, failures - free));
}

/** Failures of one account, of one address, and of all together. */
export const accountLimit = (email: string): Limit => ({ key: `account:${email.toLowerCase()}`, free: 8 });
export const addressLimit = (address: string): Limit => ({ key: `address:${network(address)}`, free: 20 });
/** Failures from a browser that signed this person in before; they count nowhere else. */
export const deviceLimit = (deviceId: string): Limit => ({ key: `device:${deviceId}`, free: 8 });
/** Failures of somebody signed in to prove who they are; guesses at sign-in do not count here. */
export const proofLimit = (personId: string): Limit => ({ key: `proof:${personId}`, free: 8 });
/** Letters asked for from one address: resets answer the same for every address of mail, so all count. */
export const letterLimit = (address: string): Limit => ({ key: `letters:${network(address)}`, free: 15 });
export const everybodyLimit: Limit = { key: 'everybody', free: 400 };
export const codeLimit = (personId: string): Limit => ({ key: `code:${personId}`, free: 5 });

/**
 * Throws `too_many` while one of the limits is closed. Counts lie in the database, so that every server and every
 * restart knows them.
 */
export async function refuseWhileClosed(services: Services, limits: readonly Limit[]): Promise<void> {
  const now = services.clock.now();
  const row = await services.db.transaction({ kind: 'none' }, (tx) =>
    services.db.row<{ until: Date | null }>(
      tx,
      'SELECT max(blocked_until) AS until FROM throttles WHERE key = ANY($keys::text[]) AND blocked_until > $now',
      { keys: limits.map(({ key }) => key), now },
    ),
  );
  if (!row?.until) return;
  const seconds = Math.ceil((row.until.getTime() - now.getTime()) / 1000);
  throw new AppError('too_many', `Too many tries. Wait ${inWords(seconds)}, then try again.`, {
    retryAfter: seconds,
  });
}

const inWords = (seconds: number) =>
  seconds < 90 ? `${seconds} second${seconds === 1 ? '' : 's'}` : `about ${Math.round(seconds / 60)} minutes`;

/** Counts a failure in a transaction of its own, so that the refused request's rollback does not forget it. */
export async function countFailure(services: Services, limits: readonly Limit[]): Promise<void> {
  const now = services.clock.now();
  await services.db.transaction({ kind: 'none' }, async (tx) => {
    for (const { key, free } of [...limits].sort((a, b) => a.key.localeCompare(b.key))) {
      const [row] = await services.db.run<{ failures: number }>(
        tx,
        `INSERT INTO throttles(key, failures, window_from) VALUES ($key, 1, $now)
         ON CONFLICT (key) DO UPDATE SET
           failures = CASE WHEN throttles.window_from < $old AND coalesce(throttles.blocked_until, $old) <= $now THEN 1 ELSE throttles.failures + 1 END,
           window_from = CASE WHEN throttles.window_from < $old AND coalesce(throttles.blocked_until, $old) <= $now THEN $now ELSE throttles.window_from END
         RETURNING failures`,
        { key, now, old: new Date(now.getTime() - WINDOW_MS) },
      );
      const wait = waitAfter(row?.failures ?? 0, free);
      if (wait === 0) continue;
      await services.db.run(tx, 'UPDATE throttles SET blocked_until = $until WHERE key = $key', {
        key,
        until: new Date(now.getTime() + wait),
      });
      if (row?.failures === free)
        services.log.warn({ event: 'throttled', limit: key.split(':')[0] }, 'too many failed tries');
    }
  });
}

/** A success forgets the failures of its own account, not those of the address or of everybody. */
export async function forgetFailures(services: Services, limit: Limit): Promise<void> {
  await services.db.transaction({ kind: 'none' }, (tx) =>
    services.db.run(tx, 'DELETE FROM throttles WHERE key = $key', { key: limit.key }),
  );
}
