import type { SessionView } from '../../shared/api/session.ts';
import { ROLE_NAMES, type VesselRole } from '../../shared/rules/permissions.ts';
import { rolesInWords } from '../lib/roleWords.ts';

/** The roles on one vessel in words. Being trusted with the owner's network is not shown as a role. */
export const shownRoles = (roles: readonly VesselRole[]): string =>
  rolesInWords(roles.filter((role) => role !== 'owner_keeper'));

/** What stands under a person's name where no vessel is shown. */
export function roleLine(session: SessionView): string {
  if (session.dealer) return ROLE_NAMES[session.dealer.role];
  const first = session.memberships[0];
  return first ? shownRoles(first.roles) : 'No role at present';
}
