import { randomUUID } from 'node:crypto';
import type { Tx } from '../db/connection.ts';
import { ABSOLUTE_MS, IDLE_MS, newToken, sha256 } from '../http/session.ts';
import type { Services } from '../services.ts';

const AT_MOST = 5;

export interface NewSession {
  readonly personId: string;
  readonly label: string;
  readonly secondFactor: boolean;
}

/** A new session; a sixth ends the oldest. Answers the session's id, which only the cookie's token holds. */
export async function openSession(
  services: Services,
  tx: Tx,
  given: NewSession,
): Promise<{ sessionId: string; endedOldest: boolean }> {
  const now = services.clock.now();
  const sessionId = newToken();
  await services.db.run(tx, 'SELECT 1 FROM people WHERE id = $person FOR UPDATE', { person: given.personId });
  const ended = await services.db.run(
    tx,
    `UPDATE sessions SET ended_at = $now WHERE id_hash IN (
       SELECT id_hash FROM sessions WHERE person_id = $person AND ended_at IS NULL AND expires_at > $now AND last_seen_at > $idle
       ORDER BY last_seen_at DESC OFFSET $keep) RETURNING 1`,
    { now, person: given.personId, idle: new Date(now.getTime() - IDLE_MS), keep: AT_MOST - 1 },
  );
  await services.db.run(
    tx,
    `INSERT INTO sessions(id_hash, public_id, person_id, label, created_at, last_seen_at, expires_at, proved_at, second_factor_at)
     VALUES ($hash, $public, $person, $label, $now, $now, $expires, $now, $second)`,
    {
      hash: sha256(sessionId),
      public: randomUUID(),
      person: given.personId,
      label: given.label,
      now,
      expires: new Date(now.getTime() + ABSOLUTE_MS),
      second: given.secondFactor ? now : null,
    },
  );
  return { sessionId, endedOldest: ended.length > 0 };
}

/** Ends a person's sessions, all or all but one, at once on every server. */
export async function endSessions(
  services: Services,
  tx: Tx,
  personId: string,
  except: Buffer | null = null,
): Promise<void> {
  await services.db.run(
    tx,
    'UPDATE sessions SET ended_at = $now WHERE person_id = $person AND ended_at IS NULL AND ($except::bytea IS NULL OR id_hash <> $except)',
    { now: services.clock.now(), person: personId, except },
  );
}

const BROWSERS: readonly [RegExp, string][] = [
  [/Edg\//, 'Edge'],
  [/Firefox\//, 'Firefox'],
  [/Chrom(e|ium)\//, 'Chromium'],
  [/Safari\//, 'Safari'],
];
const SYSTEMS: readonly [RegExp, string][] = [
  [/iPhone/, 'iPhone'],
  [/iPad/, 'iPad'],
  [/Android/, 'Android'],
  [/Windows/, 'Windows'],
  [/Mac OS X/, 'Mac'],
  [/Linux/, 'Linux'],
];

/** A browser in plain words, such as "Chromium on Android". */
export function deviceLabel(userAgent: string | undefined): string {
  const find = (table: readonly [RegExp, string][]) =>
    table.find(([pattern]) => pattern.test(userAgent ?? ''))?.[1];
  return `${find(BROWSERS) ?? 'A browser'} on ${find(SYSTEMS) ?? 'an unknown device'}`;
}
