import { randomUUID } from 'node:crypto';
import type { z } from 'zod';
import { type Language, language } from '../../shared/api/common.ts';
import type { CrewView, crewBody } from '../../shared/api/crew.ts';
import { may } from '../../shared/rules/permissions.ts';
import { endRoles } from '../auth/members.ts';
import type { Tx } from '../db/connection.ts';
import { AppError, invalid, notFound } from '../errors.ts';
import { appendLog, type LogEvent } from '../handovers/appendLog.ts';
import { markBack, markDeparted } from '../handovers/holders.ts';
import { lockLog } from '../handovers/lockLog.ts';
import { replanNetwork } from '../rotations/replan.ts';
import type { Services } from '../services.ts';
import type { Change } from '../vessels/change.ts';

interface CrewRow {
  id: string;
  person_id: string | null;
  name: string;
  position: string;
  department: string;
  email: string | null;
  language: string;
  signed_on_at: Date;
  signed_off_at: Date | null;
  holds: string[];
}

const COLUMNS = `SELECT c.id, c.person_id, c.name, c.position, c.department, c.email, c.language, c.signed_on_at, c.signed_off_at,
  ARRAY(SELECT DISTINCT n.ssid FROM holders h JOIN passphrases x ON x.id = h.passphrase_id AND x.live_at IS NOT NULL AND x.retired_at IS NULL
        JOIN networks n ON n.id = x.network_id AND n.removed_at IS NULL
        WHERE h.vessel_id = c.vessel_id AND ((h.holder_kind = 'crew' AND h.holder_id = c.id)
          OR (h.holder_kind = 'person' AND h.holder_id = c.person_id)) ORDER BY 1) AS holds
  FROM crew_members c WHERE c.vessel_id = $vessel`;

function present(row: CrewRow): CrewView {
  return {
    id: row.id,
    name: row.name,
    position: row.position,
    department: row.department,
    email: row.email,
    language: language.catch('en').parse(row.language) satisfies Language,
    signedOnAt: row.signed_on_at.toISOString(),
    signedOffAt: row.signed_off_at?.toISOString() ?? null,
    account: row.person_id !== null,
    holds: row.holds,
  };
}

/** The crew aboard by department, and those signed off in the last half year or who still hold a live passphrase. */
export async function listCrew(
  services: Services,
  tx: Tx,
  vesselId: string,
  now: Date,
): Promise<{ aboard: CrewView[]; signedOff: CrewView[] }> {
  const rows = await services.db.rows<CrewRow>(tx, `${COLUMNS} ORDER BY c.department, c.name LIMIT 1000`, {
    vessel: vesselId,
  });
  const recently = now.getTime() - 183 * 86_400_000;
  return {
    aboard: rows.filter((row) => row.signed_off_at === null).map(present),
    signedOff: rows
      .filter(
        (row) =>
          row.signed_off_at !== null && (row.holds.length > 0 || row.signed_off_at.getTime() > recently),
      )
      .sort(
        (a, b) =>
          b.holds.length - a.holds.length ||
          (b.signed_off_at?.getTime() ?? 0) - (a.signed_off_at?.getTime() ?? 0),
      )
      .map(present),
  };
}

async function readMember({ services, tx, vesselId }: Change, id: string): Promise<CrewRow> {
  const row = await services.db.row<CrewRow>(tx, `${COLUMNS} AND c.id = $id`, { vessel: vesselId, id });
  if (!row) throw notFound();
  return row;
}

const log = (
  { services, tx, vesselId, actor, now }: Change,
  kind: LogEvent['kind'],
  member: { id: string; name: string },
) =>
  appendLog(services, tx, [
    {
      vesselId,
      kind,
      at: now,
      subject: { kind: 'crew', id: member.id, name: member.name },
      actor: { id: actor.personId, name: actor.name },
    },
  ]);

type Body = z.output<typeof crewBody>;

/** Signs somebody on. An account with the same mail address becomes theirs. */
export async function addCrew(change: Change, body: Body): Promise<CrewView> {
  const { services, tx, vesselId, now } = change;
  await refuseSameMail(change, body.email, null);
  const id = randomUUID();
  await services.db.run(
    tx,
    `INSERT INTO crew_members(id, vessel_id, person_id, name, position, department, email, language, signed_on_at, created_at, updated_at)
     VALUES ($id, $vessel, NULL, $name, $position, $department, $email, $language, $signedOnAt, $now, $now)`,
    { ...body, signedOnAt: new Date(body.signedOnAt), id, vessel: vesselId, now },
  );
  await linkAccount(change, id);
  await log(change, 'crew.signed_on', { id, name: body.name });
  return present(await readMember(change, id));
}

/**
 * Makes the account with the entry's mail address theirs, where it has a role here and no other entry does. Looked
 * at again whenever the entry is used, because an account may come after the entry.
 */
async function linkAccount({ services, tx, vesselId }: Change, id: string): Promise<void> {
  await services.db.run(
    tx,
    `UPDATE crew_members c SET person_id = p.id FROM people p
     WHERE c.id = $id AND c.vessel_id = $vessel AND c.person_id IS NULL AND p.email = c.email
       AND EXISTS (SELECT 1 FROM memberships m WHERE m.person_id = p.id AND m.vessel_id = $vessel AND m.ended_at IS NULL)
       AND NOT EXISTS (SELECT 1 FROM crew_members o WHERE o.vessel_id = $vessel AND o.person_id = p.id AND o.signed_off_at IS NULL)`,
    { id, vessel: vesselId },
  );
}

/** Ending a captain's roles takes somebody who may give and end roles. */
async function refuseCaptain({ services, tx, vesselId, actor }: Change, personId: string): Promise<void> {
  if (may(actor.roles, 'members.manage')) return;
  const captain = await services.db.row(
    tx,
    "SELECT 1 FROM memberships WHERE person_id = $person AND vessel_id = $vessel AND role = 'captain' AND ended_at IS NULL",
    { person: personId, vessel: vesselId },
  );
  if (captain)
    throw new AppError('forbidden', 'Only a captain signs a captain off, because it ends that role.');
}

async function refuseSameMail(
  { services, tx, vesselId }: Change,
  email: string | null,
  except: string | null,
): Promise<void> {
  if (email === null) return;
  const same = await services.db.row<{ name: string }>(
    tx,
    'SELECT name FROM crew_members WHERE vessel_id = $vessel AND email = $email AND signed_off_at IS NULL AND id IS DISTINCT FROM $except::uuid',
    { vessel: vesselId, email, except },
  );
  if (same) throw invalid({ email: [`${same.name} is on the crew list with this address already`] });
}

/** Corrects an entry. */
export async function changeCrew(change: Change, id: string, body: Body): Promise<CrewView> {
  const { services, tx, vesselId, now } = change;
  await readMember(change, id);
  await refuseSameMail(change, body.email, id);
  await services.db.run(
    tx,
    `UPDATE crew_members SET name = $name, position = $position, department = $department, email = $email, language = $language,
       signed_on_at = $signedOnAt, updated_at = $now WHERE id = $id AND vessel_id = $vessel`,
    { ...body, signedOnAt: new Date(body.signedOnAt), id, vessel: vesselId, now },
  );
  await linkAccount(change, id);
  await log(change, 'crew.changed', { id, name: body.name });
  return present(await readMember(change, id));
}

/**
 * Signs somebody off: they are a departed holder of whatever they know, those networks' changes move up, and their
 * roles on this vessel end with the next request they make.
 */
export async function signOff(
  change: Change,
  id: string,
): Promise<{ member: CrewView; exposed: { network: string; changeAt: string | null }[] }> {
  const { services, tx, vesselId, now } = change;
  await lockLog(services, tx, vesselId);
  await linkAccount(change, id);
  const member = await readMember(change, id);
  if (member.signed_off_at) throw new AppError('conflict', `${member.name} is signed off already.`);
  if (member.person_id) await refuseCaptain(change, member.person_id);
  await services.db.run(
    tx,
    'UPDATE crew_members SET signed_off_at = $now, updated_at = $now WHERE id = $id AND vessel_id = $vessel',
    { now, id, vessel: vesselId },
  );
  // Before the roles end, so that the networks told of are all they knew, also through their account.
  const networkIds = await markDeparted(services, tx, { vesselId, kind: 'crew', ids: [id] }, now);
  if (member.person_id)
    await endRoles(services, tx, {
      personId: member.person_id,
      vesselId,
      by: { id: change.actor.personId, name: change.actor.name },
    });
  await log(change, 'crew.signed_off', member);
  for (const networkId of networkIds) await replanNetwork(services, tx, networkId, now);
  const exposed = await services.db.rows<{ ssid: string; due_at: Date | null }>(
    tx,
    `SELECT n.ssid, r.due_at FROM networks n LEFT JOIN rotations r ON r.network_id = n.id
       AND r.state IN ('planned','staged','handed_out','applying','unknown','needs_somebody')
     WHERE n.id = ANY($ids::uuid[]) ORDER BY n.ssid`,
    { ids: networkIds },
  );
  return {
    member: present(await readMember(change, id)),
    exposed: exposed.map(({ ssid, due_at }) => ({ network: ssid, changeAt: due_at?.toISOString() ?? null })),
  };
}

/** Signs somebody back on. Roles that ended are given anew by the captain. */
export async function signBackOn(change: Change, id: string): Promise<CrewView> {
  const { services, tx, vesselId, now } = change;
  await lockLog(services, tx, vesselId);
  const member = await readMember(change, id);
  if (!member.signed_off_at) throw new AppError('conflict', `${member.name} is aboard already.`);
  await refuseSameMail(change, member.email, id);
  await services.db.run(
    tx,
    'UPDATE crew_members SET signed_off_at = NULL, signed_on_at = $now, updated_at = $now WHERE id = $id AND vessel_id = $vessel',
    { now, id, vessel: vesselId },
  );
  await log(change, 'crew.signed_on', member);
  const networkIds = await markBack(services, tx, { vesselId, kind: 'crew', ids: [id] });
  for (const networkId of networkIds) await replanNetwork(services, tx, networkId, now);
  return present(await readMember(change, id));
}
