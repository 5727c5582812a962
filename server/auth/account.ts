import type { Request, Response } from 'express';
import type { DeviceView } from '../../shared/api/auth.ts';
import type { Tx } from '../db/connection.ts';
import { AppError, invalid, notFound } from '../errors.ts';
import { type Actor, newToken, setSessionCookie, sha256 } from '../http/session.ts';
import { queueMail } from '../mail/queueMail.ts';
import type { Services } from '../services.ts';
import { namesAround, refuseEasyPassword } from './easyPasswords.ts';
import { hashPassword, passwordMatches } from './passwords.ts';
import { endSessions } from './sessions.ts';
import { checkSecondFactor } from './signIn.ts';
import { countFailure, forgetFailures, proofLimit, refuseWhileClosed } from './throttle.ts';

interface OwnRow {
  id: string;
  email: string;
  password_hash: string | null;
  totp_enrolled_at: Date | null;
}

/** Checks the signed-in person's own password. Failures count by themselves: guesses of strangers do not keep them out. */
async function ownPassword(
  services: Services,
  actor: Actor,
  password: string,
  field: 'password' | 'current',
): Promise<OwnRow> {
  const limit = proofLimit(actor.personId);
  await refuseWhileClosed(services, [limit]);
  const row = await services.db.transaction({ kind: 'none' }, (tx) =>
    services.db.row<OwnRow>(
      tx,
      'SELECT id, email, password_hash, totp_enrolled_at FROM people WHERE id = $id',
      { id: actor.personId },
    ),
  );
  if (!row) throw new AppError('not_signed_in', 'Please sign in again.');
  if (!(await passwordMatches(services.config, row.password_hash, password))) {
    await countFailure(services, [limit]);
    throw invalid({ [field]: ['That is not your password.'] });
  }
  await forgetFailures(services, limit);
  return row;
}

/** Password, and code where a second factor is set up: who is asking proves it again. */
export async function proveAgain(
  services: Services,
  actor: Actor,
  given: { password: string; code?: string | undefined },
): Promise<boolean> {
  const row = await ownPassword(services, actor, given.password, 'password');
  return checkSecondFactor(services, row, given.code);
}

/**
 * Gives this session a new id, so that one seen before is worth nothing after. A proof makes it fresh; its
 * absolute end stays where it was.
 */
export async function renewSession(
  services: Services,
  tx: Tx,
  actor: Actor,
  given: { proved: boolean; secondFactor: boolean; response: Response },
): Promise<void> {
  const sessionId = newToken();
  const renewed = await services.db.run(
    tx,
    `UPDATE sessions SET id_hash = $new, last_seen_at = $now,
       proved_at = CASE WHEN $proved THEN $now::timestamptz ELSE proved_at END,
       second_factor_at = CASE WHEN $second THEN $now::timestamptz ELSE second_factor_at END
     WHERE id_hash = $old AND ended_at IS NULL RETURNING 1`,
    {
      new: sha256(sessionId),
      old: actor.sessionHash,
      now: services.clock.now(),
      proved: given.proved,
      second: given.secondFactor,
    },
  );
  if (renewed.length === 0) throw new AppError('not_signed_in', 'Please sign in again.');
  setSessionCookie(services.config, given.response, sessionId);
}

/** Slow part: checks the password of today, refuses an easy new one, and hashes it. Throws `invalid` naming the field. */
export async function preparePasswordChange(
  services: Services,
  actor: Actor,
  given: { current: string; password: string },
): Promise<string> {
  await ownPassword(services, actor, given.current, 'current');
  await refuseEasyPassword(given.password, await namesAround(services, actor.personId));
  return hashPassword(services.config, given.password);
}

/** Stores the new password, ends every other session, gives this one a new id, and mails a notice. */
export async function changePassword(
  services: Services,
  tx: Tx,
  actor: Actor,
  given: { hash: string; response: Response },
): Promise<void> {
  const now = services.clock.now();
  await services.db.run(tx, 'UPDATE people SET password_hash = $hash, updated_at = $now WHERE id = $id', {
    hash: given.hash,
    now,
    id: actor.personId,
  });
  await endSessions(services, tx, actor.personId, actor.sessionHash);
  await renewSession(services, tx, actor, { proved: false, secondFactor: false, response: given.response });
  await queueMail(services, tx, {
    kind: 'password_changed',
    to: actor.email,
    messageKey: `password_changed:${actor.personId}:${now.toISOString()}`,
    data: { name: actor.name, at: now.toISOString() },
  });
}

/** Where the person is signed in now, the last used first. */
export async function listDevices(services: Services, tx: Tx, actor: Actor): Promise<DeviceView[]> {
  const now = services.clock.now();
  const rows = await services.db.rows<{
    public_id: string;
    label: string;
    created_at: Date;
    last_seen_at: Date;
  }>(
    tx,
    `SELECT public_id, label, created_at, last_seen_at FROM sessions
     WHERE person_id = $person AND ended_at IS NULL AND expires_at > $now AND last_seen_at > $now::timestamptz - interval '30 minutes'
     ORDER BY last_seen_at DESC`,
    { person: actor.personId, now },
  );
  return rows.map((row) => ({
    id: row.public_id,
    label: row.label,
    createdAt: row.created_at.toISOString(),
    lastSeenAt: row.last_seen_at.toISOString(),
    current: row.public_id === actor.sessionPublicId,
  }));
}

/** Ends one of the person's own sessions. Throws `not_found` for another's or one that has ended. */
export async function endDevice(services: Services, tx: Tx, actor: Actor, sessionId: string): Promise<void> {
  const ended = await services.db.run(
    tx,
    'UPDATE sessions SET ended_at = $now WHERE public_id = $id AND person_id = $person AND ended_at IS NULL RETURNING 1',
    { now: services.clock.now(), id: sessionId, person: actor.personId },
  );
  if (ended.length === 0) throw notFound();
}

/** Ends every session and forgets every known browser: for a lost phone. */
export async function endEverything(services: Services, tx: Tx, actor: Actor): Promise<void> {
  await endSessions(services, tx, actor.personId);
  await services.db.run(tx, 'DELETE FROM known_devices WHERE person_id = $person', {
    person: actor.personId,
  });
}

/** Tells the browser to forget what it kept of the signed-in pages. */
export function clearSite(_request: Request, response: Response): void {
  response.setHeader('Clear-Site-Data', '"cache", "storage"');
}
