import { VESSEL_PERMISSIONS, type VesselAction } from '../../../shared/rules/permissions.ts';

/** Which actions stand together, by the first part of their name; each action stands in the first group it fits. */
const GROUPS: readonly { title: string; domains: readonly string[] }[] = [
  { title: 'The vessel and her people', domains: ['vessel', 'members'] },
  { title: 'Networks and passphrases', domains: ['networks', 'policy', 'passphrase', 'exposure'] },
  { title: 'Changes', domains: ['rotation'] },
  { title: 'Calendar and guests', domains: ['voyages', 'arrivals'] },
  { title: 'Handing out', domains: ['handovers', 'cards'] },
  { title: 'Crew', domains: ['crew'] },
  { title: 'Log', domains: ['log'] },
];

export interface PermissionGroup {
  title: string;
  actions: VesselAction[];
}

/** Every action of the permission table once, in groups; what fits none stands under "More" and is never lost. */
export function permissionGroups(): PermissionGroup[] {
  const all = Object.keys(VESSEL_PERMISSIONS) as VesselAction[];
  const domain = (action: VesselAction) => action.split('.')[0] ?? '';
  const groups = GROUPS.map(({ title, domains }) => ({
    title,
    actions: all.filter((action) => domains.includes(domain(action))),
  }));
  const rest = all.filter((action) => !GROUPS.some(({ domains }) => domains.includes(domain(action))));
  return [...groups, { title: 'More', actions: rest }].filter(({ actions }) => actions.length > 0);
}
