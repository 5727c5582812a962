import { randomUUID } from 'node:crypto';
import { setTimeout as after } from 'node:timers/promises';
import type { Request } from 'express';
import type { Tx } from '../db/connection.ts';
import { AppError } from '../errors.ts';
import { newToken, sha256 } from '../http/session.ts';
import { queueMail } from '../mail/queueMail.ts';
import type { Services } from '../services.ts';
import { namesAround, refuseEasyPassword } from './easyPasswords.ts';
import { hashPassword } from './passwords.ts';
import { endSessions } from './sessions.ts';
import { countFailure, letterLimit, refuseWhileClosed } from './throttle.ts';

const VALID_MS = 15 * 60_000;

/** Every answer takes at least this long, so that time does not tell whether an address is known (milliseconds). */
const ANSWER_MS = 250;
/** Links one person may be sent within an hour; more asking sends nothing more. */
const LINKS_AN_HOUR = 5;

/**
 * Mails a link when the address is known. Known, unknown, disabled and asked for too often answer the same, after
 * the same time. Throws `too_many` when one network address asks for very many.
 */
export async function askForReset(services: Services, request: Request, email: string): Promise<void> {
  const limit = letterLimit(request.ip ?? 'unknown');
  await refuseWhileClosed(services, [limit]);
  await Promise.all([
    after(ANSWER_MS),
    countFailure(services, [limit]),
    services.db.transaction({ kind: 'none' }, (tx) => mailLink(services, tx, email)),
  ]);
}

async function mailLink(services: Services, tx: Tx, email: string): Promise<void> {
  const { db, clock } = services;
  const now = clock.now();
  const person = await db.row<{ id: string; name: string; email: string }>(
    tx,
    'SELECT id, name, email FROM people WHERE email = $email AND disabled_at IS NULL FOR UPDATE',
    { email: email.trim() },
  );
  if (!person) return;
  const asked = await db.rows(
    tx,
    'SELECT 1 FROM password_resets WHERE person_id = $person AND created_at > $since',
    { person: person.id, since: new Date(now.getTime() - 3_600_000) },
  );
  if (asked.length >= LINKS_AN_HOUR) {
    services.log.warn({ event: 'throttled', limit: 'letters', person: person.id }, 'too many reset links');
    return;
  }
  const token = newToken();
  const id = randomUUID();
  await db.run(
    tx,
    'UPDATE password_resets SET used_at = $now WHERE person_id = $person AND used_at IS NULL',
    { person: person.id, now },
  );
  await db.run(
    tx,
    'INSERT INTO password_resets(id, person_id, token_hash, created_at, expires_at) VALUES ($id, $person, $hash, $now, $expires)',
    { id, person: person.id, hash: sha256(token), now, expires: new Date(now.getTime() + VALID_MS) },
  );
  await queueMail(services, tx, {
    kind: 'password_reset',
    to: person.email,
    messageKey: `password_reset:${id}`,
    data: { name: person.name },
    secret: token,
  });
}

const used = () =>
  new AppError(
    'gone',
    'This link has been used, replaced by a newer one, or is older than 15 minutes. Ask for a new one.',
  );

interface ResetRow {
  person_id: string;
  name: string;
  email: string;
}

const find = (services: Services, tx: Tx, token: string, lock: boolean) =>
  services.db.row<ResetRow & { id: string }>(
    tx,
    `SELECT r.id, r.person_id, p.name, p.email FROM password_resets r JOIN people p ON p.id = r.person_id
     WHERE r.token_hash = $hash AND r.used_at IS NULL AND r.expires_at > $now AND p.disabled_at IS NULL ${lock ? 'FOR UPDATE OF r' : ''}`,
    { hash: sha256(token), now: services.clock.now() },
  );

/** Slow part: refuses an easy password and hashes the new one, only for a link that still works. */
export async function prepareReset(
  services: Services,
  given: { token: string; password: string },
): Promise<string> {
  const row = await services.db.transaction({ kind: 'none' }, (tx) => find(services, tx, given.token, false));
  if (!row) throw used();
  await refuseEasyPassword(given.password, await namesAround(services, row.person_id));
  return hashPassword(services.config, given.password);
}

/** Uses the link up: the new password, every session ended, a notice mailed. The second factor stays. */
export async function useReset(services: Services, tx: Tx, token: string, hash: string): Promise<void> {
  const { db, clock } = services;
  const row = await find(services, tx, token, true);
  if (!row) throw used();
  const now = clock.now();
  await db.run(
    tx,
    'UPDATE password_resets SET used_at = $now WHERE person_id = $person AND used_at IS NULL',
    { now, person: row.person_id },
  );
  await db.run(tx, 'UPDATE people SET password_hash = $hash, updated_at = $now WHERE id = $id', {
    hash,
    now,
    id: row.person_id,
  });
  await endSessions(services, tx, row.person_id);
  await queueMail(services, tx, {
    kind: 'password_changed',
    to: row.email,
    messageKey: `password_changed:${row.id}`,
    data: { name: row.name, at: now.toISOString() },
  });
}
