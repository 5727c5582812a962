import { randomUUID } from 'node:crypto';
import type { MemberView, OpenInvitationView } from '../../shared/api/auth.ts';
import { ROLE_NAMES, type VesselRole } from '../../shared/rules/permissions.ts';
import type { Tx } from '../db/connection.ts';
import { AppError, notFound } from '../errors.ts';
import { appendLog } from '../handovers/appendLog.ts';
import { markDeparted } from '../handovers/holders.ts';
import { lockLog } from '../handovers/lockLog.ts';
import { queueMail } from '../mail/queueMail.ts';
import { replanNetwork } from '../rotations/replan.ts';
import type { Services } from '../services.ts';

/** Who has which role on the vessel now, by name. */
export async function listMembers(services: Services, tx: Tx, vesselId: string): Promise<MemberView[]> {
  const rows = await services.db.rows<{
    person_id: string;
    name: string;
    email: string;
    roles: VesselRole[];
    suspended: boolean;
    second_factor: boolean;
  }>(
    tx,
    `SELECT p.id AS person_id, p.name, p.email, array_agg(m.role ORDER BY m.role) AS roles,
            bool_and(m.suspended_at IS NOT NULL) AS suspended, p.totp_enrolled_at IS NOT NULL AS second_factor
     FROM memberships m JOIN people p ON p.id = m.person_id
     WHERE m.vessel_id = $vessel AND m.ended_at IS NULL AND (m.ends_at IS NULL OR m.ends_at > $now)
     GROUP BY p.id ORDER BY p.name`,
    { vessel: vesselId, now: services.clock.now() },
  );
  return rows.map((row) => ({
    personId: row.person_id,
    name: row.name,
    email: row.email,
    roles: row.roles,
    suspended: row.suspended,
    secondFactor: row.second_factor,
  }));
}

/** Invitations that can still be accepted, with what became of their mail. */
export async function listInvitations(
  services: Services,
  tx: Tx,
  vesselId: string,
): Promise<OpenInvitationView[]> {
  const rows = await services.db.rows<{
    id: string;
    email: string;
    name: string | null;
    roles: VesselRole[];
    created_at: Date;
    expires_at: Date;
    sent_at: Date | null;
    given_up_at: Date | null;
  }>(
    tx,
    `SELECT i.id, i.email, i.name, i.roles, i.created_at, i.expires_at, o.sent_at, o.given_up_at
     FROM invitations i LEFT JOIN mail_outbox o ON o.message_key = 'invitation:' || i.id
     WHERE i.vessel_id = $vessel AND i.accepted_at IS NULL AND i.revoked_at IS NULL AND i.expires_at > $now ORDER BY i.created_at DESC`,
    { vessel: vesselId, now: services.clock.now() },
  );
  return rows.map((row) => ({
    id: row.id,
    email: row.email,
    name: row.name,
    roles: row.roles,
    createdAt: row.created_at.toISOString(),
    expiresAt: row.expires_at.toISOString(),
    mail: row.given_up_at ? 'not_delivered' : row.sent_at ? 'sent' : 'waiting',
  }));
}

/** Ends an open invitation; the link in its mail no longer works. Throws `not_found` for one that is not open here. */
export async function withdrawInvitation(
  services: Services,
  tx: Tx,
  given: { vesselId: string; invitationId: string; by: { id: string; name: string } },
): Promise<void> {
  const now = services.clock.now();
  const ended = await services.db.run(
    tx,
    'UPDATE invitations SET revoked_at = $now WHERE id = $id AND vessel_id = $vessel AND accepted_at IS NULL AND revoked_at IS NULL RETURNING 1',
    { now, id: given.invitationId, vessel: given.vesselId },
  );
  if (ended.length === 0) throw notFound();
  await appendLog(services, tx, [
    {
      vesselId: given.vesselId,
      kind: 'invitation.withdrawn',
      at: now,
      actor: given.by,
      body: { invitation: given.invitationId },
    },
  ]);
}

/** Marks roles whose time has run out as ended, so that they can be given again. */
export async function endExpired(
  services: Services,
  tx: Tx,
  given: { personId: string; vesselId: string },
): Promise<void> {
  await services.db.run(
    tx,
    'UPDATE memberships SET ended_at = ends_at WHERE person_id = $person AND vessel_id = $vessel AND ended_at IS NULL AND ends_at <= $now',
    { person: given.personId, vessel: given.vesselId, now: services.clock.now() },
  );
}

export interface RoleChange {
  readonly vesselId: string;
  readonly personId: string;
  readonly roles: readonly VesselRole[];
  readonly suspended: boolean;
  readonly by: { readonly id: string; readonly name: string };
}

/** Sets a person's roles on a vessel. The vessel always keeps one captain who is not suspended. */
export async function setRoles(services: Services, tx: Tx, given: RoleChange): Promise<void> {
  const { db, clock } = services;
  const now = clock.now();
  const bind = { vessel: given.vesselId, person: given.personId, now };
  const wanted = [...new Set(given.roles)];
  await lockLog(services, tx, given.vesselId);
  await db.run(tx, 'SELECT 1 FROM memberships WHERE vessel_id = $vessel AND ended_at IS NULL FOR UPDATE', {
    vessel: given.vesselId,
  });
  await endExpired(services, tx, given);
  const held = await db.rows<{ role: VesselRole; suspended: boolean }>(
    tx,
    'SELECT role, suspended_at IS NOT NULL AS suspended FROM memberships WHERE vessel_id = $vessel AND person_id = $person AND ended_at IS NULL',
    { vessel: given.vesselId, person: given.personId },
  );
  if (held.length === 0) throw notFound();
  const person = await db.row<{ name: string; email: string }>(
    tx,
    'SELECT name, email FROM people WHERE id = $person',
    {
      person: given.personId,
    },
  );
  const before = held.map(({ role }) => role);
  const ended = before.filter((role) => !wanted.includes(role));
  const added = wanted.filter((role) => !before.includes(role));
  const wasSuspended = held.every((one) => one.suspended);
  await db.run(
    tx,
    'UPDATE memberships SET ended_at = $now WHERE vessel_id = $vessel AND person_id = $person AND ended_at IS NULL AND role = ANY($ended::text[])',
    { ...bind, ended },
  );
  for (const role of added) {
    await db.run(
      tx,
      'INSERT INTO memberships(id, person_id, vessel_id, role, given_by, given_at) VALUES ($id, $person, $vessel, $role, $by, $now)',
      { ...bind, id: randomUUID(), role, by: given.by.id },
    );
  }
  await db.run(
    tx,
    'UPDATE memberships SET suspended_at = CASE WHEN $suspended THEN coalesce(suspended_at, $now) END WHERE vessel_id = $vessel AND person_id = $person AND ended_at IS NULL',
    { ...bind, suspended: given.suspended },
  );
  if (before.includes('captain')) await keepACaptain(services, tx, given.vesselId);
  if (!wanted.includes('captain') || given.suspended)
    await voidInvitationsBy(services, tx, given.personId, given.vesselId);
  const about = {
    vesselId: given.vesselId,
    at: now,
    actor: given.by,
    subject: { kind: 'person', id: given.personId, name: person?.name },
  } as const;
  if (wanted.length === 0) await leaveVessel(services, tx, given.personId, given.vesselId);
  const suspension = given.suspended !== wasSuspended && wanted.length > 0;
  const [entry] = await appendLog(services, tx, [
    ...(added.length > 0
      ? [{ ...about, kind: 'role.given' as const, body: { roles: added.join(',') } }]
      : []),
    ...(ended.length > 0
      ? [{ ...about, kind: 'role.ended' as const, body: { roles: ended.join(',') } }]
      : []),
    ...(suspension
      ? [
          {
            ...about,
            kind: given.suspended ? ('role.ended' as const) : ('role.given' as const),
            body: { roles: wanted.join(','), suspended: given.suspended },
          },
        ]
      : []),
  ]);
  if (person && added.length > 0 && !given.suspended) {
    const vessel = await db.row<{ name: string }>(tx, 'SELECT name FROM vessels WHERE id = $vessel', {
      vessel: given.vesselId,
    });
    await queueMail(services, tx, {
      kind: 'role_given',
      to: person.email,
      vesselId: given.vesselId,
      messageKey: `role_given:${entry}`,
      data: {
        name: person.name,
        place: vessel?.name ?? 'your vessel',
        roles: added.map((role) => ROLE_NAMES[role]),
        by: given.by.name,
      },
    });
  }
}

async function keepACaptain(services: Services, tx: Tx, vesselId: string): Promise<void> {
  const captain = await services.db.row(
    tx,
    `SELECT 1 FROM memberships WHERE vessel_id = $vessel AND role = 'captain' AND ended_at IS NULL AND suspended_at IS NULL LIMIT 1`,
    { vessel: vesselId },
  );
  if (!captain)
    throw new AppError('not_now', 'A vessel keeps at least one captain. Give somebody else that role first.');
}

async function voidInvitationsBy(
  services: Services,
  tx: Tx,
  personId: string,
  vesselId: string,
): Promise<void> {
  await services.db.run(
    tx,
    'UPDATE invitations SET revoked_at = $now WHERE invited_by = $person AND vessel_id = $vessel AND accepted_at IS NULL AND revoked_at IS NULL',
    { now: services.clock.now(), person: personId, vessel: vesselId },
  );
}

/**
 * Somebody without a role any more has left the vessel as far as their account goes: what they hold through it is
 * exposed, and those networks are planned anew. Through their entry on the crew list they stay until they sign off.
 */
async function leaveVessel(services: Services, tx: Tx, personId: string, vesselId: string): Promise<void> {
  const now = services.clock.now();
  const networks = await markDeparted(services, tx, { vesselId, kind: 'person', ids: [personId] }, now);
  for (const networkId of networks) await replanNetwork(services, tx, networkId, now);
}

/**
 * Ends every role of somebody who signs off, at once, and voids what they had invited, with its line in the log.
 * Throws `not_now` for the vessel's last captain. Does nothing for somebody without a role.
 */
export async function endRoles(
  services: Services,
  tx: Tx,
  given: {
    readonly personId: string;
    readonly vesselId: string;
    readonly by: { readonly id: string; readonly name: string };
  },
): Promise<void> {
  const now = services.clock.now();
  await lockLog(services, tx, given.vesselId);
  await endExpired(services, tx, given);
  const ended = await services.db.run<{ role: VesselRole }>(
    tx,
    'UPDATE memberships SET ended_at = $now WHERE person_id = $person AND vessel_id = $vessel AND ended_at IS NULL RETURNING role',
    { now, person: given.personId, vessel: given.vesselId },
  );
  if (ended.length === 0) return;
  if (ended.some(({ role }) => role === 'captain')) await keepACaptain(services, tx, given.vesselId);
  await voidInvitationsBy(services, tx, given.personId, given.vesselId);
  const person = await services.db.row<{ name: string }>(tx, 'SELECT name FROM people WHERE id = $id', {
    id: given.personId,
  });
  await appendLog(services, tx, [
    {
      vesselId: given.vesselId,
      kind: 'role.ended',
      at: now,
      actor: given.by,
      subject: { kind: 'person', id: given.personId, name: person?.name },
      body: { roles: ended.map(({ role }) => role).join(',') },
    },
  ]);
  await leaveVessel(services, tx, given.personId, given.vesselId);
}
