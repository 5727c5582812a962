import { randomUUID } from 'node:crypto';
import { Calendar, minutes } from './calendar.ts';
import { layCrewHoldings, layHandover } from './holdings.ts';
import {
  DEFAULT_QUIET,
  type LaidVessel,
  type Laying,
  type NetworkPlan,
  networkOf,
  type VesselPlan,
} from './laying.ts';
import { type Aboard, layPlans } from './layPlans.ts';
import { layVessel } from './layVessel.ts';
import { inventedCrew } from './ordinary.ts';
import { layParty } from './parties.ts';
import { madeUp } from './passphrases.ts';
import { STORY_CAPTAINS } from './people.ts';
import { laySilentChange } from './silentChange.ts';

const NOTHING_ABOARD: Aboard = { voyages: [], parties: [], exposures: {} };
const FROM = new Date('2020-01-01T00:00:00Z');

type Ages = readonly [owner: number, guest: number, crew: number];

function calendarOf(laying: Laying, zone: string): Calendar {
  return new Calendar([{ zone, fromAt: FROM }], laying.now);
}

function networksOf(
  name: string,
  calendar: Calendar,
  ages: Ages,
  typed: Partial<Record<'owner' | 'guest' | 'crew', { passphrase: string; bits: number }>> = {},
): NetworkPlan[] {
  const [owner, guest, crew] = ages;
  const plan = (
    audience: 'owner' | 'guest' | 'crew',
    ssid: string,
    age: number,
    limitDays: number,
  ): NetworkPlan => ({
    audience,
    ssid,
    security: 'wpa2',
    liveAt: calendar.aged(age, '10:30'),
    limitDays,
    typed: typed[audience],
    quietHours: DEFAULT_QUIET,
    movesUp: true,
  });
  return [
    plan('owner', name, owner, 365),
    plan('guest', `${name} Guests`, guest, 14),
    plan('crew', `${name} Crew`, crew, 45),
  ];
}

const base = (laying: Laying, heardMinutes: number) => ({
  source: 'dock' as const,
  driver: 'rehearsal' as const,
  lastHeardAt: minutes(laying.now, -heardMinutes),
  accessPoints: [{ name: 'Bridge' }, { name: 'Saloon' }, { name: 'Lower deck' }, { name: 'Crew mess' }],
});

/** Nothing changed for a year: passphrases typed in long ago, the crew's weak, eleven people gone with them. */
export async function laySolveigMaren(laying: Laying): Promise<LaidVessel> {
  const name = 'Solveig Maren';
  const calendar = calendarOf(laying, 'Europe/Oslo');
  const words = [name, 'Henning Aasland', 'Bergen'];
  const left = [340, 310, 268, 201, 155, 120, 64, 18].map((days) => calendar.aged(days, '12:00'));
  const vessel = await layVessel(laying, {
    ...base(laying, 2),
    name,
    kind: 'explorer yacht',
    lengthM: 51,
    guestsMax: 10,
    homePort: 'Bergen',
    ownerName: 'Henning Aasland',
    lying: 'Bergen, south quay',
    zone: 'Europe/Oslo',
    // Nobody aboard has taken it up: by hand, so that it stays as it is until somebody does.
    driver: 'by_hand',
    crew: [
      ...inventedCrew(laying.dice, 6, 30, 300),
      ...inventedCrew(laying.dice, left.length, 400, 700).map((member, index) => ({
        ...member,
        signedOffAt: left[index],
      })),
    ],
    // And nobody has said what should move a change up.
    networks: networksOf(name, calendar, [212, 61, 388], {
      owner: await madeUp('years', 'wpa2', words),
      guest: await madeUp('months', 'wpa2', words),
      crew: await madeUp('hours', 'wpa2', words),
    }).map((network) => ({ ...network, movesUp: false })),
  });
  layCrewHoldings(laying, vessel, networkOf(vessel, 'crew'));
  layGoneGuests(laying, vessel, 3, 20);
  return vessel;
}

/** The owner is aboard, so the owner's network waits past its limit. */
export async function layCorvina(laying: Laying): Promise<LaidVessel> {
  const name = 'Corvina';
  const calendar = calendarOf(laying, 'Europe/Rome');
  const vessel = await layVessel(laying, {
    ...base(laying, 14),
    name,
    kind: 'motor yacht',
    lengthM: 38,
    guestsMax: 8,
    homePort: 'La Spezia',
    ownerName: 'Amadeo Lunghi',
    lying: 'Portofino, at anchor',
    zone: 'Europe/Rome',
    source: 'satellite',
    crew: [captainOf(name), ...inventedCrew(laying.dice, 5, 30, 300)],
    networks: networksOf(name, calendar, [402, 9, 30], {
      owner: await madeUp('years', 'wpa2', [name, 'Amadeo Lunghi', 'La Spezia']),
    }),
  });
  const trip = { kind: 'owner_trip', startsAt: calendar.at(-41, '12:00'), endsAt: calendar.at(9, '10:00') };
  laying.rows.add('voyages', {
    id: randomUUID(),
    vessel_id: vessel.id,
    kind: trip.kind,
    title: "Owner's trip",
    starts_at: trip.startsAt,
    ends_at: trip.endsAt,
    from_port: 'La Spezia',
    to_port: 'La Spezia',
    created_at: laying.now,
    updated_at: laying.now,
  });
  layCrewHoldings(laying, vessel, networkOf(vessel, 'crew'));
  layPlans(laying, vessel, { ...NOTHING_ABOARD, voyages: [trip] }, []);
  return vessel;
}

/** The boat went silent three days ago with two of four access points changed: which runs what is not known. */
export async function layPetrelHollow(laying: Laying): Promise<LaidVessel> {
  const name = 'Petrel Hollow';
  const calendar = calendarOf(laying, 'America/Antigua');
  const silentSince = calendar.aged(3, '11:04');
  const vessel = await layVessel(laying, {
    ...base(laying, 0),
    name,
    kind: 'sailing yacht',
    lengthM: 34,
    guestsMax: 8,
    homePort: "St John's, Antigua",
    ownerName: 'Delphine Achebe-Moor',
    lying: 'At sea, 40 miles south of Antigua',
    zone: 'America/Antigua',
    source: 'satellite',
    lastHeardAt: silentSince,
    crew: inventedCrew(laying.dice, 6, 30, 300),
    networks: networksOf(name, calendar, [96, 33, 21]),
  });
  layCrewHoldings(laying, vessel, networkOf(vessel, 'crew'));
  layGoneGuests(laying, vessel, 6, 5);
  await laySilentChange(laying, vessel, silentSince);
  layPlans(laying, vessel, NOTHING_ABOARD, ['guest']);
  return vessel;
}

/** One crew member has just signed off and still holds a passphrase that is past its limit. */
export async function layAnselma(laying: Laying): Promise<LaidVessel> {
  const name = 'Anselma';
  const calendar = calendarOf(laying, 'Europe/Madrid');
  const signedOff = minutes(laying.now, -95);
  const vessel = await layVessel(laying, {
    ...base(laying, 1),
    name,
    kind: 'motor yacht',
    lengthM: 29,
    guestsMax: 6,
    homePort: 'Palma',
    ownerName: 'Cayetana Brusi',
    lying: 'Palma, berth B9',
    zone: 'Europe/Madrid',
    crew: [
      captainOf(name),
      ...inventedCrew(laying.dice, 3, 30, 300),
      { name: 'Piotr Wesolek', position: 'Deckhand', signedOnDays: 190, signedOffAt: signedOff },
    ],
    networks: networksOf(name, calendar, [40, 2, 77], {
      crew: await madeUp('years', 'wpa2', [name, 'Cayetana Brusi', 'Palma']),
    }),
  });
  layCrewHoldings(laying, vessel, networkOf(vessel, 'crew'));
  layPlans(
    laying,
    vessel,
    { ...NOTHING_ABOARD, exposures: { crew: [{ kind: 'sign_off', at: signedOff }] } },
    [],
  );
  return vessel;
}

function captainOf(vessel: string): VesselPlan['crew'][number] {
  const captain = STORY_CAPTAINS.find((person) => person.vessel === vessel);
  if (!captain) throw new Error(`${vessel} has no captain`);
  return {
    name: captain.name,
    position: 'Captain',
    department: 'Deck',
    email: captain.email,
    signedOnDays: 500,
  };
}

/** A party that left so many days ago with the guest network's passphrase, which is still in force. */
function layGoneGuests(laying: Laying, vessel: LaidVessel, count: number, daysAgo: number): void {
  const { calendar } = vessel;
  const network = networkOf(vessel, 'guest');
  const ashoreAt = calendar.aged(daysAgo, '10:00');
  const arrivesAt = calendar.aged(daysAgo + 7, '15:00');
  const people = inventedCrew(laying.dice, count, 1, 1);
  const party = layParty(laying, vessel, {
    name: people[0]?.name.split(' ').at(-1) ?? 'Party',
    voyageId: null,
    arrivesAt,
    leavesAt: ashoreAt,
    ashoreAt,
    guests: people.map(({ name }) => ({ name, language: 'en', cabinId: null })),
  });
  for (const [index, guest] of party.guests.entries()) {
    layHandover(laying, vessel, network, {
      kind: 'guest',
      id: guest.id,
      name: guest.name,
      channel: 'screen',
      at: minutes(arrivesAt, 5 + index * 2),
      departedAt: ashoreAt,
    });
  }
}
