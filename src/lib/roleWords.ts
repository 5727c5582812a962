import {
  DEALER_ROLES,
  type DealerRole,
  ROLE_NAMES,
  VESSEL_ROLES,
  type VesselRole,
} from '../../shared/rules/permissions.ts';

/** Roles in words, in the order of the permission table: "Captain, purser, ETO". */
export function rolesInWords(roles: readonly (VesselRole | DealerRole)[]): string {
  return [...VESSEL_ROLES, ...DEALER_ROLES]
    .filter((role) => roles.includes(role))
    .map((role, index) => (index === 0 || role === 'eto' ? ROLE_NAMES[role] : lowered(ROLE_NAMES[role])))
    .join(', ');
}

const lowered = (name: string) => name.charAt(0).toLowerCase() + name.slice(1);
