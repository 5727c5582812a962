import { randomUUID } from 'node:crypto';
import { Calendar, minutes } from './calendar.ts';
import type { Dice } from './dice.ts';
import { layCrewHoldings } from './holdings.ts';
import {
  ACCESS_POINTS,
  BERTHS,
  CREW_POSITIONS,
  FAMILY_NAMES,
  GIVEN_NAMES,
  KINDS,
  ORDINARY_VESSELS,
} from './invented.ts';
import { type CrewPlan, DEFAULT_QUIET, type Laying, type NetworkPlan, networkOf } from './laying.ts';
import { layPlans } from './layPlans.ts';
import { layVessel } from './layVessel.ts';
import { layParty } from './parties.ts';

const FROM = new Date('2020-01-01T00:00:00Z');
const LIMITS = { owner: 365, guest: 14, crew: 45 } as const;

/** Four of the ordinary ones are late with one network, by so many times its limit. */
const LATE: Readonly<Record<number, { audience: 'guest' | 'crew'; times: number }>> = {
  3: { audience: 'guest', times: 1.4 },
  11: { audience: 'crew', times: 1.9 },
  19: { audience: 'guest', times: 2.1 },
  30: { audience: 'crew', times: 1.3 },
};

/** Crew with invented names, no two alike within one call, signed on between so many days ago. */
export function inventedCrew(dice: Dice, count: number, fromDays: number, toDays: number): CrewPlan[] {
  const names = new Set<string>();
  while (names.size < count) names.add(`${dice.pick(GIVEN_NAMES)} ${dice.pick(FAMILY_NAMES)}`);
  return [...names].map((name, index) => ({
    name,
    position: CREW_POSITIONS[index % CREW_POSITIONS.length] ?? 'Deckhand',
    signedOnDays: dice.between(fromDays, toDays),
  }));
}

/** The vessels without a story: most in order, a few late. */
export async function layOrdinary(laying: Laying): Promise<void> {
  for (const [index, name] of ORDINARY_VESSELS.entries()) await layOne(laying, name, index);
}

async function layOne(laying: Laying, name: string, index: number): Promise<void> {
  const { dice, now } = laying;
  const berth = dice.pick(BERTHS);
  const calendar = new Calendar([{ zone: berth.zone, fromAt: FROM }], now);
  const late = LATE[index];
  const age = (audience: keyof typeof LIMITS) => {
    const times = late?.audience === audience ? late.times : 0.03 + dice.next() * 0.85;
    return Math.max(0, Math.floor(LIMITS[audience] * times));
  };
  const security = dice.pick(['wpa2', 'wpa2', 'transition', 'wpa3'] as const);
  const network = (audience: keyof typeof LIMITS, ssid: string): NetworkPlan => ({
    audience,
    ssid,
    security,
    liveAt: calendar.aged(age(audience), '10:30'),
    limitDays: LIMITS[audience],
    quietHours: DEFAULT_QUIET,
    movesUp: true,
  });
  const vessel = await layVessel(laying, {
    name,
    kind: dice.pick(KINDS),
    lengthM: dice.between(22, 68),
    guestsMax: dice.between(6, 12),
    homePort: berth.port,
    ownerName: `${dice.pick(GIVEN_NAMES)} ${dice.pick(FAMILY_NAMES)}`,
    lying: `${berth.port}, ${/\d/.test(berth.berth) ? 'berth ' : ''}${berth.berth}`,
    zone: berth.zone,
    source: dice.pick(['dock', 'dock', 'cellular', 'satellite'] as const),
    // The late ones are late because each change waits for somebody to enter it by hand.
    driver: late ? 'by_hand' : 'rehearsal',
    lastHeardAt: minutes(now, -dice.between(1, 20)),
    accessPoints: ACCESS_POINTS.slice(0, dice.between(3, 5)).map((point) => ({ name: point })),
    crew: inventedCrew(dice, dice.between(3, 6), 20, 400),
    networks: [network('owner', name), network('guest', `${name} Guests`), network('crew', `${name} Crew`)],
  });
  layCrewHoldings(laying, vessel, networkOf(vessel, 'crew'));
  const arrives = dice.between(2, 9);
  const arrivesAt = calendar.at(arrives, '15:00');
  const endsAt = calendar.at(arrives + 7, '10:00');
  const voyageId = randomUUID();
  const party = dice.pick(FAMILY_NAMES);
  laying.rows.add('voyages', {
    id: voyageId,
    vessel_id: vessel.id,
    kind: 'charter',
    title: `${party} charter`,
    starts_at: arrivesAt,
    ends_at: endsAt,
    from_port: berth.port,
    to_port: berth.port,
    created_at: now,
    updated_at: now,
  });
  const plan = layParty(laying, vessel, {
    name: party,
    voyageId,
    arrivesAt,
    leavesAt: endsAt,
    ashoreAt: null,
    guests: [],
  });
  layPlans(
    laying,
    vessel,
    { voyages: [{ kind: 'charter', startsAt: arrivesAt, endsAt }], parties: [plan], exposures: {} },
    [],
  );
}
