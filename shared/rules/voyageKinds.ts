import type { VoyageKind } from '../api/common.ts';

/** What a kind of voyage is called; also a voyage's title before those who may not see guests, since titles carry names. */
export const VOYAGE_KIND_NAMES: Readonly<Record<VoyageKind, string>> = {
  charter: 'Charter',
  owner_trip: "Owner's trip",
  crossing: 'Crossing',
  yard: 'Yard period',
};
