import type { z } from 'zod';
import type { FleetAge, FleetDot, FleetRow, fleetQuery } from '../../shared/api/fleet.ts';
import type { Standing } from '../../shared/rules/fleet.ts';
import type { Audience } from '../../shared/rules/permissions.ts';
import type { NetworkFacts, VesselFacts } from './fleetFacts.ts';
import {
  ageDays,
  ageRatio,
  guessRank,
  isSilent,
  type NextChange,
  nextChange,
  pastLimit,
  standingOf,
  weakest,
  worstStanding,
} from './judge.ts';

export type FleetQuery = z.output<typeof fleetQuery>;

/** One dot for each network whose age is known. */
export function presentDots(vessels: readonly VesselFacts[], now: Date): FleetDot[] {
  return vessels.flatMap((vessel) =>
    vessel.networks.flatMap((network) => {
      const age = ageDays(network, now);
      if (age === null) return [];
      return {
        networkId: network.networkId,
        vesselId: vessel.vesselId,
        vesselName: vessel.name,
        audience: network.audience,
        ageDays: rounded(age, 100),
        limitDays: network.limitDays,
        ratio: rounded(age / network.limitDays, 10_000),
        exposedCount: network.departed,
      };
    }),
  );
}

export const rounded = (figure: number, to: number): number => Math.round(figure * to) / to;

export function presentRow(vessel: VesselFacts, now: Date): FleetRow {
  return {
    vesselId: vessel.vesselId,
    name: vessel.name,
    zone: vessel.zone,
    standing: vesselStanding(vessel, now),
    ages: {
      owner: worstAge(vessel, 'owner', now),
      guest: worstAge(vessel, 'guest', now),
      crew: worstAge(vessel, 'crew', now),
    },
    weakest: weakest(vessel.networks),
    departedHolding: departedHolding(vessel),
    nextChange: presentNextChange(nextChange(vessel.networks)),
    lastHeardAt: vessel.lastHeardAt?.toISOString() ?? null,
    silent: isSilent(vessel.lastHeardAt, now),
  };
}

export const vesselStanding = (vessel: VesselFacts, now: Date): Standing =>
  worstStanding(vessel.networks.map((network) => standingOf(network, now)));

export const departedHolding = (vessel: VesselFacts): number =>
  vessel.networks.reduce((sum, network) => sum + network.departed, 0);

export const presentNextChange = (change: NextChange) => ({
  kind: change.kind,
  audience: change.audience,
  dueAt: change.dueAt?.toISOString() ?? null,
  words: change.words,
});

function worstAge(vessel: VesselFacts, audience: Audience, now: Date): FleetAge | null {
  const [worst] = vessel.networks
    .filter((network) => network.audience === audience)
    .sort((one, other) => (ageRatio(other, now) ?? -1) - (ageRatio(one, now) ?? -1));
  return worst ? presentAge(worst, now) : null;
}

export function presentAge(network: NetworkFacts, now: Date): FleetAge {
  const age = ageDays(network, now);
  return {
    networkId: network.networkId,
    days: age === null ? null : Math.floor(age),
    limitDays: network.limitDays,
    pastLimit: pastLimit(network, now),
  };
}

/** What the table is ordered by, largest first; equals stay in the order of their names. */
function measure(vessel: VesselFacts, sort: FleetQuery['sort'], now: Date): readonly number[] {
  switch (sort) {
    case 'name':
      return [];
    case 'owner':
    case 'guest':
    case 'crew':
      return [worstAge(vessel, sort, now)?.days ?? -1];
    case 'weakest': {
      const found = weakest(vessel.networks);
      return [found ? -guessRank(found.words.split(', ')[1] ?? '') : Number.NEGATIVE_INFINITY];
    }
    case 'departed':
      return [departedHolding(vessel)];
    case 'heard':
      return [vessel.lastHeardAt ? now.getTime() - vessel.lastHeardAt.getTime() : Number.POSITIVE_INFINITY];
    case 'worst':
      return worstFirst(vessel, now);
  }
}

/** Past the limit and exposed, then past it, then exposed, then due; within each by age against limit. */
function worstFirst(vessel: VesselFacts, now: Date): readonly number[] {
  const places = vessel.networks.map((network) => {
    const exposed = network.departed > 0 || network.leaks > 0;
    const past = pastLimit(network, now);
    if (past && exposed) return 4;
    if (past) return 3;
    if (exposed) return 2;
    return standingOf(network, now) === 'due' ? 1 : 0;
  });
  const ratios = vessel.networks.map((network) => ageRatio(network, now) ?? 0);
  return [Math.max(-1, ...places), Math.max(-1, ...ratios)];
}

/** The vessels of the table that match, in order. */
export function sorted(vessels: readonly VesselFacts[], query: FleetQuery, now: Date): VesselFacts[] {
  const wanted = query.search?.trim().toLocaleLowerCase('en') ?? '';
  return vessels
    .filter((vessel) => wanted === '' || vessel.name.toLocaleLowerCase('en').includes(wanted))
    .filter((vessel) => query.standing === undefined || vesselStanding(vessel, now) === query.standing)
    .map((vessel) => ({ vessel, by: measure(vessel, query.sort, now) }))
    .sort((one, other) => {
      for (const [index, figure] of one.by.entries()) {
        const difference = compare(other.by[index] ?? 0, figure);
        if (difference !== 0) return difference;
      }
      return (
        one.vessel.name.localeCompare(other.vessel.name, 'en') ||
        (one.vessel.vesselId < other.vessel.vesselId ? -1 : 1)
      );
    })
    .map(({ vessel }) => vessel);
}

const compare = (one: number, other: number): number => (one === other ? 0 : one < other ? -1 : 1);
