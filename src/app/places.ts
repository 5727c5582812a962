import type { SessionView } from '../../shared/api/session.ts';
import { may, type VesselAction, type VesselRole } from '../../shared/rules/permissions.ts';

/** A page of a vessel or of the fleet, as the navigation shows it. */
export interface Place {
  label: string;
  to: string;
  /** Current only on the address itself, not on what lies below it. */
  end?: boolean;
}

const VESSEL_PLACES: readonly { label: string; path: string; action: VesselAction }[] = [
  { label: 'Arrivals', path: 'arrivals', action: 'arrivals.view' },
  { label: 'Networks', path: 'networks', action: 'networks.view' },
  { label: 'Crew', path: 'crew', action: 'crew.view' },
  { label: 'Cards', path: 'cards', action: 'cards.view' },
  { label: 'Log', path: 'log', action: 'log.view' },
  { label: 'Settings', path: 'settings', action: 'vessel.settings' },
];

/** The pages of a vessel that somebody with these roles may see, in the order of a day's work. */
export function vesselPlaces(vesselId: string, roles: readonly VesselRole[]): Place[] {
  const below = `/vessels/${vesselId}`;
  const places = VESSEL_PLACES.filter(({ action }) => may(roles, action)).map(({ label, path }) => ({
    label,
    to: `${below}/${path}`,
  }));
  // Whoever keeps the crew list finds their own code below it.
  const hasOwnPage = may(roles, 'crew.own') && !may(roles, 'crew.view');
  if (!hasOwnPage) return places;
  const own = { label: 'Crew Wi-Fi', to: `${below}/crew` };
  return may(roles, 'networks.view') ? [...places, own] : [own, ...places];
}

/** The pages of the dealer. */
export const FLEET_PLACES: readonly Place[] = [
  { label: 'Fleet', to: '/fleet', end: true },
  { label: 'Vessels', to: '/fleet/vessels' },
];

/** Where somebody starts after signing in: the fleet, else the first page of their first vessel, else their account. */
export function firstPlace(session: SessionView): string {
  if (session.dealer) return '/fleet';
  for (const { vesselId, roles } of session.memberships) {
    const place = vesselPlaces(vesselId, roles)[0];
    if (place) return place.to;
  }
  return '/account';
}
