import type { Request } from 'express';
import { language } from '../../shared/api/common.ts';
import type { SessionView } from '../../shared/api/session.ts';
import type { VesselRole } from '../../shared/rules/permissions.ts';
import type { Tx } from '../db/connection.ts';
import { AppError } from '../errors.ts';
import { type Actor, csrfToken, readSessionCookie } from '../http/session.ts';
import type { Services } from '../services.ts';

/** The session as its person sees it: their own names, roles and vessels, nothing of the vessels' own. */
export async function presentSession(
  services: Services,
  tx: Tx,
  actor: Actor,
  request: Request,
): Promise<SessionView> {
  const sessionId = readSessionCookie(services.config, request);
  if (!sessionId) throw new AppError('not_signed_in', 'Please sign in.');
  const now = services.clock.now();
  // Names of the person's own vessels, across vessels: the query itself is bound to the person.
  await services.db.setScope(tx, { kind: 'system' });
  const vessels = await services.db.rows<{ id: string; name: string; roles: VesselRole[]; asked: string[] }>(
    tx,
    `SELECT v.id, v.name, array_agg(m.role ORDER BY m.role) AS roles, v.second_factor_roles AS asked
     FROM memberships m JOIN vessels v ON v.id = m.vessel_id
     WHERE m.person_id = $person AND m.ended_at IS NULL AND m.suspended_at IS NULL AND (m.ends_at IS NULL OR m.ends_at > $now)
     GROUP BY v.id ORDER BY v.name`,
    { person: actor.personId, now },
  );
  const dealer = actor.dealerId
    ? await services.db.row<{ id: string; name: string; asked: string[] }>(
        tx,
        'SELECT id, name, second_factor_roles AS asked FROM dealers WHERE id = $id',
        { id: actor.dealerId },
      )
    : null;
  const required =
    vessels.some((vessel) => vessel.roles.some((role) => vessel.asked.includes(role))) ||
    (dealer !== null && actor.dealerRole !== null && dealer.asked.includes(actor.dealerRole));
  return {
    person: {
      id: actor.personId,
      name: actor.name,
      email: actor.email,
      locale: language.catch('en').parse(actor.locale),
    },
    csrf: csrfToken(services.config, sessionId),
    memberships: vessels.map((vessel) => ({
      vesselId: vessel.id,
      vesselName: vessel.name,
      roles: vessel.roles,
    })),
    dealer: dealer && actor.dealerRole ? { id: dealer.id, name: dealer.name, role: actor.dealerRole } : null,
    secondFactor: { enrolled: actor.secondFactorEnrolled, required },
    provedAt: actor.provedAt.toISOString(),
  };
}
