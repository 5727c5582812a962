/** Words of the fleet's page that both sides need. */

/** A network's state at a glance, from best to worst. */
export const STANDINGS = ['in_order', 'due', 'overdue', 'exposed'] as const;
export type Standing = (typeof STANDINGS)[number];

/** What the fleet's table may be sorted by. */
export const FLEET_SORTS = [
  'worst',
  'name',
  'owner',
  'guest',
  'crew',
  'weakest',
  'departed',
  'heard',
] as const;
export type FleetSort = (typeof FLEET_SORTS)[number];

/** What can be said of a vessel's or network's next change. */
export const NEXT_CHANGE_KINDS = ['due', 'held', 'under_way', 'unknown', 'needs_somebody', 'none'] as const;
export type NextChangeKind = (typeof NEXT_CHANGE_KINDS)[number];
