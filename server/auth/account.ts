import type { Request, Response } from 'express';
import type { DeviceView } from '../../shared/api/auth.ts';
import type { Tx } from '../db/connection.ts';
import { AppError, invalid, notFound } from '../errors.ts';
import { type Actor, setSessionCookie } from '../http/session.ts';
import { queueMail } from '../mail/queueMail.ts';
import type { Services } from '../services.ts';
import { hashPassword, passwordMatches, refuseEasyPassword } from './passwords.ts';
import { endSessions, openSession } from './sessions.ts';
import { checkSecondFactor } from './signIn.ts';
import { accountLimit, countFailure, refuseWhileClosed } from './throttle.ts';

interface OwnRow {
  id: string;
  email: string;
  password_hash: string | null;
  totp_enrolled_at: Date | null;
}

/** Checks the signed-in person's own password; failures count against their account. */
async function ownPassword(
  services: Services,
  actor: Actor,
  password: string,
  field: 'password' | 'current',
): Promise<OwnRow> {
  const limit = accountLimit(actor.email);
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

/** A fresh session in place of this one, so that an id seen before the proof is worth nothing after it. */
export async function renewSession(
  services: Services,
  tx: Tx,
  actor: Actor,
  given: { secondFactor: boolean; label: string; response: Response },
): Promise<void> {
  await services.db.run(tx, 'UPDATE sessions SET ended_at = $now WHERE id_hash = $hash', {
    now: services.clock.now(),
    hash: actor.sessionHash,
  });
  const { sessionId } = await openSession(services, tx, {
    personId: actor.personId,
    label: given.label,
    secondFactor: given.secondFactor,
  });
  setSessionCookie(services.config, given.response, sessionId);
}

export async function preparePasswordChange(
  services: Services,
  actor: Actor,
  given: { current: string; password: string },
): Promise<string> {
  await ownPassword(services, actor, given.current, 'current');
  await refuseEasyPassword(given.password, [actor.name, actor.email]);
  return hashPassword(services.config, given.password);
}

/** Stores the new password, ends every other session, and mails a notice. */
export async function changePassword(services: Services, tx: Tx, actor: Actor, hash: string): Promise<void> {
  const now = services.clock.now();
  await services.db.run(tx, 'UPDATE people SET password_hash = $hash, updated_at = $now WHERE id = $id', {
    hash,
    now,
    id: actor.personId,
  });
  await endSessions(services, tx, actor.personId, actor.sessionHash);
  await queueMail(services, tx, {
    kind: 'password_changed',
    to: actor.email,
    messageKey: `password_changed:${actor.personId}:${now.toISOString()}`,
    data: { name: actor.name, at: now.toISOString() },
  });
}

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
