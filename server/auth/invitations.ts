import { randomUUID } from 'node:crypto';
import type { Request } from 'express';
import type { AcceptInvitation, InvitationView } from '../../shared/api/auth.ts';
import { type DealerRole, ROLE_NAMES, type VesselRole } from '../../shared/rules/permissions.ts';
import type { Tx } from '../db/connection.ts';
import { AppError, invalid } from '../errors.ts';
import { appendLog } from '../handovers/appendLog.ts';
import { markBack } from '../handovers/holders.ts';
import { lockLog } from '../handovers/lockLog.ts';
import { newToken, sha256 } from '../http/session.ts';
import { queueMail } from '../mail/queueMail.ts';
import type { Services } from '../services.ts';
import { refuseEasyPassword } from './easyPasswords.ts';
import { endExpired } from './members.ts';
import { hashPassword } from './passwords.ts';
import { checkPassword } from './signIn.ts';

const VALID_MS = 72 * 3_600_000;

export interface NewInvitation {
  readonly vesselId: string;
  readonly email: string;
  readonly name?: string | undefined;
  readonly roles: readonly VesselRole[];
  readonly by: { readonly id: string; readonly name: string };
}

/** Invites somebody to a vessel: one link by mail, for 72 hours. The transaction must see the vessel. */
export async function invite(services: Services, tx: Tx, given: NewInvitation): Promise<string> {
  const { db, clock } = services;
  const now = clock.now();
  const vessel = await db.row<{ name: string }>(tx, 'SELECT name FROM vessels WHERE id = $id', {
    id: given.vesselId,
  });
  if (!vessel) throw new AppError('not_found', 'There is no such vessel.');
  await db.run(
    tx,
    'UPDATE invitations SET revoked_at = $now WHERE vessel_id = $vessel AND email = $email AND accepted_at IS NULL AND revoked_at IS NULL',
    { now, vessel: given.vesselId, email: given.email },
  );
  const id = randomUUID();
  const token = newToken();
  const expiresAt = new Date(now.getTime() + VALID_MS);
  await db.run(
    tx,
    `INSERT INTO invitations(id, token_hash, email, name, vessel_id, roles, invited_by, created_at, expires_at)
     VALUES ($id, $hash, $email, $name, $vessel, $roles::text[], $by, $now, $expires)`,
    {
      id,
      hash: sha256(token),
      email: given.email,
      name: given.name ?? null,
      vessel: given.vesselId,
      roles: given.roles,
      by: given.by.id,
      now,
      expires: expiresAt,
    },
  );
  await queueMail(services, tx, {
    kind: 'invitation',
    to: given.email,
    vesselId: given.vesselId,
    messageKey: `invitation:${id}`,
    data: {
      name: given.name ?? null,
      place: vessel.name,
      roles: given.roles.map((role) => ROLE_NAMES[role]),
      by: given.by.name,
      expiresAt: expiresAt.toISOString(),
    },
    secret: token,
  });
  await appendLog(services, tx, [
    {
      vesselId: given.vesselId,
      kind: 'invitation.sent',
      at: now,
      actor: given.by,
      body: { invitation: id, roles: given.roles.join(',') },
    },
  ]);
  return id;
}

interface InvitationRow {
  id: string;
  email: string;
  vessel_id: string;
  place: string;
  roles: VesselRole[];
  invited_by: string;
  inviter: string;
  expires_at: Date;
  person_id: string | null;
}

const gone = () =>
  new AppError(
    'gone',
    'This invitation has been used, withdrawn or is older than 72 hours. Ask whoever invited you for a new one.',
  );

/** The open invitation of a token. Throws `gone` too when the inviter may no longer give these roles. */
async function open(services: Services, tx: Tx, token: string, lock: boolean): Promise<InvitationRow> {
  const { db, clock } = services;
  // The person is not signed in, so the vessel is looked up by the token alone.
  await db.setScope(tx, { kind: 'system' });
  const row = await db.row<InvitationRow>(
    tx,
    `SELECT i.id, i.email, i.vessel_id, v.name AS place, i.roles, i.invited_by, b.name AS inviter, i.expires_at, p.id AS person_id
     FROM invitations i JOIN vessels v ON v.id = i.vessel_id JOIN people b ON b.id = i.invited_by
     LEFT JOIN people p ON p.email = i.email
     WHERE i.token_hash = $hash AND i.accepted_at IS NULL AND i.revoked_at IS NULL AND i.expires_at > $now
       AND b.disabled_at IS NULL AND (
         EXISTS (SELECT 1 FROM memberships m WHERE m.person_id = i.invited_by AND m.vessel_id = i.vessel_id AND m.role = 'captain'
                 AND m.ended_at IS NULL AND m.suspended_at IS NULL AND (m.ends_at IS NULL OR m.ends_at > $now))
         OR EXISTS (SELECT 1 FROM dealer_members d WHERE d.person_id = i.invited_by AND d.dealer_id = v.dealer_id
                    AND d.ended_at IS NULL AND d.suspended_at IS NULL))
     ${lock ? 'FOR UPDATE OF i' : ''}`,
    { hash: sha256(token), now: clock.now() },
  );
  if (!row) throw gone();
  return row;
}

/** What the invitation offers. Uses nothing up, so a mail scanner that opens it does no harm. */
export async function readInvitation(services: Services, tx: Tx, token: string): Promise<InvitationView> {
  const row = await open(services, tx, token, false);
  return {
    email: row.email,
    place: row.place,
    roles: row.roles satisfies (VesselRole | DealerRole)[],
    known: row.person_id !== null,
    expiresAt: row.expires_at.toISOString(),
  };
}

/**
 * Slow part. Somebody new: refuses an easy password and hashes the chosen one. Somebody known: checks their own
 * password, counted as at sign-in, because a forwarded mail alone must not act in their name.
 */
export async function prepareAcceptance(
  services: Services,
  request: Request,
  given: AcceptInvitation,
): Promise<string | null> {
  const row = await services.db.transaction({ kind: 'none' }, (tx) => open(services, tx, given.token, false));
  if (row.person_id !== null) {
    if (!given.password) throw invalid({ password: ['Give the password of your account here'] });
    try {
      await checkPassword(services, request, { email: row.email, password: given.password });
    } catch (error) {
      if (error instanceof AppError && error.code === 'wrong_sign_in')
        throw invalid({ password: ['That is not the password of this account'] });
      throw error;
    }
    return null;
  }
  const errors: Record<string, string[]> = {};
  if (!given.name) errors.name = ['Give your name, as it will stand in the log'];
  if (!given.password) errors.password = ['Choose a password'];
  if (!given.name || !given.password) throw invalid(errors);
  await refuseEasyPassword(given.password, [given.name, row.email, row.place]);
  return hashPassword(services.config, given.password);
}

/** Uses the invitation up: one account, one membership a role, one log entry, however often it is pressed. */
export async function acceptInvitation(
  services: Services,
  tx: Tx,
  given: AcceptInvitation,
  hash: string | null,
): Promise<void> {
  const { db, clock } = services;
  const { vessel_id } = await open(services, tx, given.token, false);
  await lockLog(services, tx, vessel_id);
  const row = await open(services, tx, given.token, true);
  const now = clock.now();
  let personId = row.person_id;
  let name = given.name ?? row.email;
  if (personId === null) {
    if (!hash || !given.name) throw gone();
    personId = randomUUID();
    await db.run(
      tx,
      `INSERT INTO people(id, name, email, locale, password_hash, created_at, updated_at)
       VALUES ($id, $name, $email, $locale, $hash, $now, $now)`,
      { id: personId, name: given.name, email: row.email, locale: given.locale ?? 'en', hash, now },
    );
  } else {
    name =
      (await db.row<{ name: string }>(tx, 'SELECT name FROM people WHERE id = $id', { id: personId }))
        ?.name ?? name;
  }
  await endExpired(services, tx, { personId, vesselId: row.vessel_id });
  for (const role of row.roles) {
    await db.run(
      tx,
      `INSERT INTO memberships(id, person_id, vessel_id, role, given_by, given_at) VALUES ($id, $person, $vessel, $role, $by, $now)
       ON CONFLICT (person_id, vessel_id, role) WHERE ended_at IS NULL DO NOTHING`,
      { id: randomUUID(), person: personId, vessel: row.vessel_id, role, by: row.invited_by, now },
    );
  }
  await markBack(services, tx, { vesselId: row.vessel_id, kind: 'person', ids: [personId] });
  await db.run(tx, 'UPDATE invitations SET accepted_at = $now WHERE id = $id', { now, id: row.id });
  await appendLog(services, tx, [
    {
      vesselId: row.vessel_id,
      kind: 'role.given',
      at: now,
      subject: { kind: 'person', id: personId, name },
      actor: { id: row.invited_by, name: row.inviter },
      body: { roles: row.roles.join(','), invitation: row.id },
    },
  ]);
}
