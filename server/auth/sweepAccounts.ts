import type { Services } from '../services.ts';

const DAY_MS = 86_400_000;
/** Ended sessions, used links and answered keys are kept this long for questions, in days. */
const KEPT_DAYS = 30;
/** A browser not seen for this long is a stranger again, as long as its cookie lives, in days. */
const KNOWN_DAYS = 180;

/** Clears away what can open nothing any more: sessions, links, keys, counts, forgotten browsers. Answers how many rows. */
export async function sweepAccounts(services: Services): Promise<number> {
  const now = services.clock.now();
  const ago = (days: number) => new Date(now.getTime() - days * DAY_MS);
  const cleared = await services.db.transaction({ kind: 'system' }, (tx) =>
    services.db.run<{ cleared: number }>(
      tx,
      `WITH a AS (DELETE FROM sessions WHERE expires_at < $kept RETURNING 1),
            b AS (DELETE FROM password_resets WHERE expires_at < $kept RETURNING 1),
            c AS (DELETE FROM throttles WHERE window_from < $day AND (blocked_until IS NULL OR blocked_until < $now) RETURNING 1),
            d AS (DELETE FROM known_devices WHERE last_used_at < $known RETURNING 1),
            e AS (DELETE FROM idempotency_keys WHERE created_at < $kept RETURNING 1)
       SELECT (SELECT count(*) FROM a) + (SELECT count(*) FROM b) + (SELECT count(*) FROM c)
            + (SELECT count(*) FROM d) + (SELECT count(*) FROM e) AS cleared`,
      { now, kept: ago(KEPT_DAYS), day: ago(1), known: ago(KNOWN_DAYS) },
    ),
  );
  return Number(cleared[0]?.cleared ?? 0);
}
