import { z } from 'zod';
import { FLEET_SORTS, NEXT_CHANGE_KINDS, STANDINGS } from '../rules/fleet.ts';
import { audience, id, instant, rotationState, security, source } from './common.ts';
import { contract, dealer } from './contract.ts';

/** In order, due, overdue, exposed: a network's state at a glance, or the worst of a vessel's. */
export const fleetStanding = z.enum(STANDINGS);

/** How old one audience's passphrase is: the worst network where a vessel has several of one audience. */
const fleetAge = z.strictObject({
  networkId: id,
  /** Whole days since it came into force; null where none has been recorded. */
  days: z.number().int().nullable(),
  limitDays: z.number().int(),
  pastLimit: z.boolean(),
});
export type FleetAge = z.infer<typeof fleetAge>;

/**
 * The vessel's next change. `due`: at `dueAt`, to be written in `zone`; `held`: `words` say why it waits;
 * the rest: `words` say it all. Never a party's or voyage's title.
 */
export const fleetNextChange = z.strictObject({
  kind: z.enum(NEXT_CHANGE_KINDS),
  audience: audience.nullable(),
  dueAt: instant.nullable(),
  /** "held: owner aboard", "under way", "no report from the boat", "None planned"; empty for `due`. */
  words: z.string(),
});
export type FleetNextChange = z.infer<typeof fleetNextChange>;

/** Words for the weakest live passphrase: "Crew, hours to guess". Never bits, lengths or scores (R16). */
const fleetWeakest = z.strictObject({ audience, words: z.string() });

export const fleetRow = z.strictObject({
  vesselId: id,
  name: z.string(),
  /** IANA zone of ship's time in force now. */
  zone: z.string(),
  standing: fleetStanding,
  ages: z.strictObject({
    owner: fleetAge.nullable(),
    guest: fleetAge.nullable(),
    crew: fleetAge.nullable(),
  }),
  weakest: fleetWeakest.nullable(),
  /** Departed people who still hold a live passphrase of this vessel, counted once a network. */
  departedHolding: z.number().int(),
  nextChange: fleetNextChange,
  lastHeardAt: instant.nullable(),
  /** True when the boat has been silent for a day or more. */
  silent: z.boolean(),
});
export type FleetRow = z.infer<typeof fleetRow>;

/** One dot of the plot. `ratio` is age divided by limit: above 1 is past it. */
export const fleetDot = z.strictObject({
  networkId: id,
  vesselId: id,
  vesselName: z.string(),
  audience,
  ageDays: z.number(),
  limitDays: z.number().int(),
  ratio: z.number(),
  /** Departed holders of its live passphrase. */
  exposedCount: z.number().int(),
});
export type FleetDot = z.infer<typeof fleetDot>;

export const fleetFigures = z.strictObject({
  vessels: z.number().int(),
  networks: z.number().int(),
  /** Networks without a passphrase on record: their age cannot be told. */
  ageUnknown: z.number().int(),
  pastLimit: z.number().int(),
  /** Past the limit, and departed people hold the live passphrase. */
  pastLimitExposed: z.number().int(),
  /** Departed people hold the live passphrase, within the limit or past it. */
  heldByDeparted: z.number().int(),
  /** Exposed in any way: departed holder, lost card or reported leak. */
  exposed: z.number().int(),
});
export type FleetFigures = z.infer<typeof fleetFigures>;

export const fleetView = z.strictObject({
  dealer: z.strictObject({ name: z.string() }),
  /** When the figures were taken. */
  at: instant,
  figures: fleetFigures,
  /** The page's first line: what is so. */
  sentence: z.string(),
  /** Every network whose age is known, for the plot. */
  networks: z.array(fleetDot),
  /** One page of the table. */
  vessels: z.array(fleetRow),
  /** Vessels that match the filter, over all pages. */
  matching: z.number().int(),
  page: z.number().int(),
  limit: z.number().int(),
});
export type FleetView = z.infer<typeof fleetView>;

/** Sorting and filtering touch the table only; figures, sentence and plot are always of the whole fleet. */
export const fleetQuery = z.strictObject({
  sort: z.enum(FLEET_SORTS, { error: `Sort by one of: ${FLEET_SORTS.join(', ')}` }).default('worst'),
  standing: fleetStanding.optional(),
  search: z.string().max(100, 'Search for at most 100 characters').optional(),
  limit: z.coerce.number().int().min(1).max(100).default(100),
  page: z.coerce.number().int().min(1).max(1000).default(1),
});

export const readFleet = contract({
  name: 'fleet.read',
  method: 'GET',
  path: '/fleet',
  summary: "Ages, rough strength and exposure over the dealer's fleet",
  access: dealer('fleet.view'),
  query: fleetQuery,
  response: fleetView,
});

export const exportFleet = contract({
  name: 'fleet.export',
  method: 'POST',
  path: '/fleet/export',
  summary: 'The whole fleet, one line a network, as CSV',
  access: dealer('fleet.export'),
  body: z.strictObject({}),
  response: 'csv',
});

/** A change as the dealer sees it. */
const fleetChange = z.strictObject({
  id,
  networkId: id,
  audience,
  state: rotationState,
  /** `late` when in force, or still not, after its deadline; null where that cannot be said. */
  timing: z.enum(['on_time', 'late']).nullable(),
  plannedBy: z.enum(['plan', 'person']),
  urgent: z.boolean(),
  dueAt: instant,
  deadlineAt: instant.nullable(),
  liveAt: instant.nullable(),
  /** What became of it, in words: "in force since …" is the client's; here "under way", "given up". */
  words: z.string(),
});
export type FleetChange = z.infer<typeof fleetChange>;

export const fleetVesselView = z.strictObject({
  vesselId: id,
  name: z.string(),
  kind: z.string(),
  lengthM: z.number().nullable(),
  lying: z.string().nullable(),
  source,
  zone: z.string(),
  standing: fleetStanding,
  lastHeardAt: instant.nullable(),
  silent: z.boolean(),
  networks: z.array(
    z.strictObject({
      networkId: id,
      ssid: z.string(),
      audience,
      security,
      carriesEquipment: z.boolean(),
      standing: fleetStanding,
      ageDays: z.number().nullable(),
      limitDays: z.number().int(),
      ratio: z.number().nullable(),
      liveAt: instant.nullable(),
      /** "hours to guess"; null where no passphrase is on record. */
      guess: z.string().nullable(),
      holders: z.number().int(),
      departedHolders: z.number().int(),
      openLeaks: z.number().int(),
      nextChange: fleetNextChange,
    }),
  ),
  /** Newest first, at most 100. */
  history: z.array(fleetChange),
});
export type FleetVesselView = z.infer<typeof fleetVesselView>;

export const readFleetVessel = contract({
  name: 'fleet.vessel',
  method: 'GET',
  path: '/fleet/vessels/:vesselId',
  summary: "One vessel of the dealer's fleet: ages, rough strength, exposure and its changes",
  access: dealer('fleet.view'),
  params: z.strictObject({ vesselId: id }),
  response: fleetVesselView,
});
