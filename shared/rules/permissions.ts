/**
 * Who may do what: the one place that says so. The server enforces these sentences, the client only
 * hides what they refuse, and the vessel's settings show them as a table.
 */

/** Roles a person can hold on one vessel. Roles add up; on a small boat one person has several. */
export const VESSEL_ROLES = ['captain', 'chief_stew', 'purser', 'eto', 'crew', 'owner_keeper'] as const;
export type VesselRole = (typeof VESSEL_ROLES)[number];

/** Roles a person can hold at a dealer. */
export const DEALER_ROLES = ['service_desk'] as const;
export type DealerRole = (typeof DEALER_ROLES)[number];

export const AUDIENCES = ['owner', 'guest', 'crew'] as const;
export type Audience = (typeof AUDIENCES)[number];

export const AUDIENCE_NAMES: Readonly<Record<Audience, string>> = {
  owner: 'Owner',
  guest: 'Guest',
  crew: 'Crew',
};

export const ROLE_NAMES: Record<VesselRole | DealerRole, string> = {
  captain: 'Captain',
  chief_stew: 'Chief stew',
  purser: 'Purser',
  eto: 'ETO',
  crew: 'Crew member',
  owner_keeper: "Trusted with the owner's network",
  service_desk: 'Dealer, service desk',
};

interface Permission<R> {
  /** Completes "may …" on the settings page. */
  readonly may: string;
  readonly roles: readonly R[];
}

const EVERYONE: readonly VesselRole[] = ['captain', 'chief_stew', 'purser', 'eto', 'crew'];
const OFFICERS: readonly VesselRole[] = ['captain', 'chief_stew', 'purser', 'eto'];
const INTERIOR: readonly VesselRole[] = ['captain', 'chief_stew', 'purser'];
const HEADS: readonly VesselRole[] = ['captain', 'chief_stew'];
const CAPTAIN: readonly VesselRole[] = ['captain'];
const TECHNICAL: readonly VesselRole[] = ['captain', 'eto'];
const OWNER_SIDE: readonly VesselRole[] = ['captain', 'owner_keeper'];

export const VESSEL_PERMISSIONS = {
  'vessel.view': { may: "see the vessel's name, berth and ship's time", roles: EVERYONE },
  'vessel.settings': { may: "see the vessel's settings", roles: OFFICERS },
  'vessel.edit': { may: "change the vessel, its cabins, ship's time and retention", roles: CAPTAIN },
  'members.view': { may: 'see who has which role', roles: HEADS },
  'members.manage': { may: 'invite people and give or end roles', roles: CAPTAIN },
  'networks.view': { may: 'see networks, ages and planned changes', roles: OFFICERS },
  'networks.edit': { may: 'add and edit networks and access points', roles: TECHNICAL },
  'policy.edit': { may: "change a network's policy", roles: CAPTAIN },
  'passphrase.type': { may: 'type in the passphrase in force today', roles: TECHNICAL },
  'passphrase.reveal.owner': { may: "look up the owner network's passphrase", roles: OWNER_SIDE },
  'passphrase.reveal.guest': { may: "look up the guest network's passphrase", roles: INTERIOR },
  'passphrase.reveal.crew': { may: "look up the crew network's passphrase", roles: EVERYONE },
  'rotation.plan.owner': { may: "change, plan or cancel on the owner's network", roles: CAPTAIN },
  'rotation.plan.guest': { may: 'change, plan or cancel on the guest network', roles: HEADS },
  'rotation.plan.crew': { may: 'change, plan or cancel on the crew network', roles: HEADS },
  'rotation.enter': {
    may: "open a change's entry sheet, which shows the new passphrase and starts the change, on any network",
    roles: TECHNICAL,
  },
  'exposure.report': { may: 'report that a passphrase leaked', roles: OFFICERS },
  'voyages.view': { may: "see the vessel's calendar", roles: OFFICERS },
  'voyages.edit': { may: "change the vessel's calendar", roles: INTERIOR },
  'arrivals.view': { may: 'see parties and guests', roles: INTERIOR },
  'arrivals.edit': { may: 'add, import and correct guests', roles: INTERIOR },
  'handovers.guest': { may: 'hand out the guest network', roles: INTERIOR },
  'handovers.crew': { may: 'hand out the crew network', roles: HEADS },
  'handovers.owner': { may: "hand out the owner's network", roles: OWNER_SIDE },
  'cards.view': { may: 'see join cards and their state', roles: INTERIOR },
  'cards.print.guest': { may: 'print guest join cards', roles: INTERIOR },
  'cards.print.crew': { may: 'print crew join cards', roles: HEADS },
  'cards.print.owner': { may: "print owner's join cards", roles: OWNER_SIDE },
  'crew.view': { may: 'see the crew list', roles: HEADS },
  'crew.manage': { may: 'sign crew on and off', roles: HEADS },
  'crew.own': { may: "open one's own page with the crew network's code", roles: EVERYONE },
  'log.view': { may: 'read the log', roles: INTERIOR },
  'log.export': { may: 'export the log', roles: HEADS },
} as const satisfies Record<string, Permission<VesselRole>>;

export type VesselAction = keyof typeof VESSEL_PERMISSIONS;

export const DEALER_PERMISSIONS = {
  'fleet.view': { may: 'see ages, strength and exposure over the fleet', roles: ['service_desk'] },
  'fleet.export': { may: 'export the fleet', roles: ['service_desk'] },
  'fleet.addVessel': { may: 'add a vessel and invite its captain', roles: ['service_desk'] },
} as const satisfies Record<string, Permission<DealerRole>>;

export type DealerAction = keyof typeof DEALER_PERMISSIONS;

/** True when one of the person's roles on this vessel allows the action. */
export function may(roles: readonly VesselRole[], action: VesselAction): boolean {
  const allowed: readonly VesselRole[] = VESSEL_PERMISSIONS[action].roles;
  return roles.some((role) => allowed.includes(role));
}

/** True when the dealer role allows the action. */
export function dealerMay(role: DealerRole | null, action: DealerAction): boolean {
  if (role === null) return false;
  const allowed: readonly DealerRole[] = DEALER_PERMISSIONS[action].roles;
  return allowed.includes(role);
}

/** The action that reveals a network of this audience. */
export const revealAction = (audience: Audience): VesselAction => `passphrase.reveal.${audience}`;
/** The action that changes or plans a network of this audience. */
export const planAction = (audience: Audience): VesselAction => `rotation.plan.${audience}`;
/** The action that prints cards of this audience. */
export const printAction = (audience: Audience): VesselAction => `cards.print.${audience}`;
/** The action that hands out a network of this audience. */
export const handOverAction = (audience: Audience): VesselAction => `handovers.${audience}`;
