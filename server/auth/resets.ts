import { randomUUID } from 'node:crypto';
import type { Tx } from '../db/connection.ts';
import { AppError } from '../errors.ts';
import { newToken, sha256 } from '../http/session.ts';
import { queueMail } from '../mail/queueMail.ts';
import type { Services } from '../services.ts';
import { hashPassword, refuseEasyPassword } from './passwords.ts';
import { endSessions } from './sessions.ts';

const VALID_MS = 15 * 60_000;

/** Queues a link when the address is known; the caller answers the same either way. */
export async function askForReset(services: Services, tx: Tx, email: string): Promise<void> {
  const { db, clock } = services;
  const now = clock.now();
  const person = await db.row<{ id: string; name: string; email: string }>(
    tx,
    'SELECT id, name, email FROM people WHERE email = $email AND disabled_at IS NULL',
    { email: email.trim() },
  );
  // The same work for an unknown address, so that time tells nothing.
  const token = newToken();
  const id = randomUUID();
  if (!person) return;
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
  await refuseEasyPassword(given.password, [row.name, row.email]);
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
