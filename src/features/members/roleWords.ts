import { ROLE_NAMES, VESSEL_ROLES, type VesselRole } from '../../../shared/rules/permissions.ts';

/** Roles in words, in the order of the permission table: "Captain, purser, ETO". */
export function rolesInWords(roles: readonly VesselRole[]): string {
  return VESSEL_ROLES.filter((role) => roles.includes(role))
    .map((role, index) => (index === 0 || role === 'eto' ? ROLE_NAMES[role] : ROLE_NAMES[role].toLowerCase()))
    .join(', ');
}
