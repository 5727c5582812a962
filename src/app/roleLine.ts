import type { SessionView } from '../../shared/api/session.ts';
import { ROLE_NAMES, type VesselRole } from '../../shared/rules/permissions.ts';

/** The roles on one vessel in words: "Captain, purser". Being trusted with the owner's network is not shown as a role. */
export function rolesInWords(roles: readonly VesselRole[]): string {
  const names = roles.filter((role) => role !== 'owner_keeper').map((role) => ROLE_NAMES[role]);
  return names.map((name, index) => (index === 0 || name === 'ETO' ? name : name.toLowerCase())).join(', ');
}

/** What stands under a person's name where no vessel is shown. */
export function roleLine(session: SessionView): string {
  if (session.dealer) return ROLE_NAMES[session.dealer.role];
  const first = session.memberships[0];
  return first ? rolesInWords(first.roles) : 'No role at present';
}
