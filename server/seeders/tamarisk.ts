import { randomUUID } from 'node:crypto';
import { Calendar, earlier, minutes } from './calendar.ts';
import { layCrewHoldings } from './holdings.ts';
import { DEFAULT_QUIET, type LaidVessel, type Laying, networkOf, type VesselPlan } from './laying.ts';
import { layPlans } from './layPlans.ts';
import { layVessel } from './layVessel.ts';
import { layParty } from './parties.ts';
import { TAMARISK_PEOPLE } from './people.ts';
import { FIRST_SERIAL, layCards, layOwnerHoldings, layOwnersChange } from './tamariskAboard.ts';

const ZONE = 'Europe/Zagreb';
const FROM = new Date('2020-01-01T00:00:00Z');

const ACCESS_POINTS = [
  { name: 'Wheelhouse', deck: 'Bridge deck' },
  { name: 'Main saloon', deck: 'Main deck' },
  { name: 'Lower deck lobby', deck: 'Lower deck' },
  { name: 'Crew mess', deck: 'Lower deck' },
  { name: 'Aft deck', deck: 'Main deck' },
];

const CABINS = [
  { deck: 'Bridge deck', name: "Owner's suite" },
  { deck: 'Lower deck', name: 'Port VIP' },
  { deck: 'Lower deck', name: 'Starboard VIP' },
  { deck: 'Lower deck', name: 'Twin forward' },
  { deck: 'Lower deck', name: 'Twin aft' },
] as const;

const GUESTS = [
  { cabin: "Owner's suite", name: 'Sigrun Brandvold', language: 'en' },
  { cabin: "Owner's suite", name: 'Aksel Brandvold', language: 'de' },
  { cabin: 'Port VIP', name: 'Matteo Quaranta', language: 'it' },
  { cabin: 'Port VIP', name: 'Livia Quaranta', language: 'it' },
  { cabin: 'Starboard VIP', name: 'Theo Abara', language: 'fr' },
  { cabin: 'Twin forward', name: 'Nils Abara', language: 'en', under16: true },
  { cabin: 'Twin forward', name: 'Runa Abara', language: 'en', under16: true },
  { cabin: 'Twin aft', name: null, language: 'es' },
] as const;

/** The party's day: when the last one left, when the network changed, when this one comes and cards went out. */
function day(calendar: Calendar, now: Date) {
  // Before the morning's change is over, the change was yesterday's.
  const changedToday = now.getTime() >= calendar.at(0, '11:10').getTime();
  const left = calendar.at(changedToday ? 0 : -1, '10:00');
  const changed = calendar.at(changedToday ? 0 : -1, '11:00');
  const arrives = calendar.at(0, '14:00');
  return {
    left,
    changed,
    arrives,
    leaves: calendar.at(6, '10:00'),
    // Guests who came aboard before the demo's hour; never a time that is still to come.
    handed: [minutes(arrives, 6), minutes(arrives, 6), minutes(arrives, 11)].map((at, index) =>
      earlier(at, minutes(now, index === 2 ? -1 : -6)),
    ),
  };
}

/** Crew who signed off after the last quiet hour, so that the change their leaving calls for is still to come. */
function signOffs(calendar: Calendar, now: Date): [Date, Date] {
  const today = calendar.at(0, '11:30');
  const quietOver = today.getTime() < now.getTime() ? today : calendar.at(-1, '11:30');
  const span = now.getTime() - quietOver.getTime();
  const after = (part: number) => new Date(quietOver.getTime() + Math.round(span * part));
  return [after(0.3), after(0.6)];
}

function plan(calendar: Calendar, now: Date): VesselPlan {
  const [first, second] = signOffs(calendar, now);
  const crew = [
    ...TAMARISK_PEOPLE.map(({ name, position, department, email }) => ({
      name,
      position,
      department,
      email,
      signedOnDays: 240,
    })),
    { name: 'Bram Oyelaran', position: 'First officer', department: 'Deck', signedOnDays: 300 },
    { name: 'Yusuf Lindqvist', position: 'Chief engineer', department: 'Engine', signedOnDays: 410 },
    { name: 'Petra Saari', position: 'Stewardess', department: 'Interior', signedOnDays: 70 },
    { name: 'Noor Castelijn', position: 'Chef', department: 'Galley', signedOnDays: 130 },
    { name: 'Luka Perišin', position: 'Day worker, varnish', department: 'Deck', signedOnDays: 6 },
    { name: 'Ana Kekez', position: 'Day worker, varnish', department: 'Deck', signedOnDays: 6 },
    { name: 'Marin Tadić', position: 'Day worker, rigging', department: 'Deck', signedOnDays: 3 },
    {
      name: 'Elio Marchesan',
      position: 'Deckhand',
      department: 'Deck',
      signedOnDays: 200,
      signedOffAt: first,
    },
    {
      name: 'Saoirse Dunne',
      position: 'Stewardess',
      department: 'Interior',
      signedOnDays: 160,
      signedOffAt: second,
    },
  ];
  const network = { security: 'wpa2' as const, quietHours: DEFAULT_QUIET, movesUp: true };
  return {
    name: 'Tamarisk',
    kind: 'motor yacht',
    lengthM: 42,
    guestsMax: 8,
    homePort: 'Split',
    ownerName: 'Ottoline Brandt',
    lying: 'Split, berth C14',
    zone: ZONE,
    source: 'dock',
    driver: 'by_hand',
    lastHeardAt: minutes(now, -1),
    lastSerial: FIRST_SERIAL + GUESTS.length - 1,
    accessPoints: ACCESS_POINTS,
    crew,
    networks: [
      {
        ...network,
        audience: 'owner',
        ssid: 'Tamarisk',
        liveAt: calendar.aged(182, '10:00'),
        limitDays: 365,
        quietHours: [{ days: [1, 2, 3, 4, 5, 6, 7], from: '10:00', to: '12:00' }],
      },
      {
        ...network,
        audience: 'guest',
        ssid: 'Tamarisk Guests',
        liveAt: day(calendar, now).changed,
        limitDays: 14,
      },
      {
        ...network,
        audience: 'crew',
        ssid: 'Tamarisk Crew',
        liveAt: calendar.aged(41, '10:30'),
        limitDays: 45,
      },
    ],
  };
}

/** The vessel shown in full: a party arriving today, cards printed, a crew network that two have left with. */
export async function layTamarisk(laying: Laying): Promise<LaidVessel> {
  const { now, rows, log } = laying;
  const calendar = new Calendar([{ zone: ZONE, fromAt: FROM }], now);
  const vessel = await layVessel(laying, plan(calendar, now));
  const times = day(calendar, now);
  const cabins = new Map(
    CABINS.map((cabin, position) => {
      const id = randomUUID();
      rows.add('cabins', { id, vessel_id: vessel.id, deck: cabin.deck, name: cabin.name, position });
      return [cabin.name, id];
    }),
  );
  const voyages = layVoyages(laying, vessel, times);
  const last = layParty(laying, vessel, {
    name: 'Odhiambo party',
    voyageId: voyages.last,
    arrivesAt: calendar.at(-7, '15:00'),
    leavesAt: times.left,
    ashoreAt: times.left,
    guests: [
      { name: 'Grace Odhiambo', language: 'en', cabinId: cabins.get("Owner's suite") ?? null },
      { name: 'Samuel Odhiambo', language: 'en', cabinId: cabins.get("Owner's suite") ?? null },
      { name: 'Inés Valbuena', language: 'es', cabinId: cabins.get('Port VIP') ?? null },
      { name: 'Rémy Fontanel', language: 'fr', cabinId: cabins.get('Starboard VIP') ?? null },
    ],
  });
  log.push({
    vesselId: vessel.id,
    kind: 'party.ashore',
    at: times.left,
    body: { guests: last.guests.length },
  });
  const party = layParty(laying, vessel, {
    name: 'Brandvold party',
    voyageId: voyages.now,
    arrivesAt: times.arrives,
    leavesAt: times.leaves,
    ashoreAt: null,
    guests: GUESTS.map((guest) => ({ ...guest, cabinId: cabins.get(guest.cabin) ?? null })),
  });
  const more = voyages.later.map((one) => layParty(laying, vessel, { ...one, ashoreAt: null, guests: [] }));
  layCards(laying, vessel, party.guests, times);
  layCrewHoldings(laying, vessel, networkOf(vessel, 'crew'));
  layOwnerHoldings(laying, vessel);
  const owner = layOwnersChange(laying, vessel, calendar.at(29, '10:00'));
  log.push({
    vesselId: vessel.id,
    kind: 'rotation.planned',
    at: minutes(now, -2 * 1440),
    networkId: owner.networkId,
    subject: { kind: 'rotation', id: owner.id },
    body: { audience: 'owner' },
  });
  layPlans(
    laying,
    vessel,
    {
      voyages: voyages.all,
      parties: [last, party, ...more],
      exposures: { crew: signOffs(calendar, now).map((at) => ({ kind: 'sign_off' as const, at })) },
    },
    ['owner'],
  );
  return vessel;
}

/** A weekly pattern between Split, Korčula and Corfu, with the crossing and the owner's trip of six weeks. */
function layVoyages(laying: Laying, vessel: LaidVessel, times: { left: Date; arrives: Date; leaves: Date }) {
  const { calendar } = vessel;
  const at = (days: number, time: string) => calendar.at(days, time);
  const all: { kind: string; startsAt: Date; endsAt: Date }[] = [];
  const voyage = (
    kind: string,
    title: string,
    startsAt: Date,
    endsAt: Date,
    fromPort: string,
    toPort: string,
  ) => {
    const id = randomUUID();
    laying.rows.add('voyages', {
      id,
      vessel_id: vessel.id,
      kind,
      title,
      starts_at: startsAt,
      ends_at: endsAt,
      from_port: fromPort,
      to_port: toPort,
      created_at: laying.now,
      updated_at: laying.now,
    });
    all.push({ kind, startsAt, endsAt });
    return id;
  };
  const last = voyage('charter', 'Odhiambo charter', at(-7, '15:00'), times.left, 'Korčula', 'Split');
  const now = voyage('charter', 'Brandvold charter', times.arrives, times.leaves, 'Split', 'Korčula');
  const second = { name: 'Castellane party', arrivesAt: at(7, '15:00'), leavesAt: at(14, '10:00') };
  const secondId = voyage(
    'charter',
    'Castellane charter',
    second.arrivesAt,
    second.leavesAt,
    'Korčula',
    'Split',
  );
  voyage('crossing', 'Crossing to Corfu', at(14, '16:00'), at(19, '09:00'), 'Split', 'Corfu');
  voyage('owner_trip', "Owner's trip", at(20, '12:00'), at(28, '10:00'), 'Corfu', 'Corfu');
  const third = { name: 'Nakagawa-Reyes party', arrivesAt: at(30, '15:00'), leavesAt: at(39, '10:00') };
  const thirdId = voyage(
    'charter',
    'Nakagawa-Reyes charter',
    third.arrivesAt,
    third.leavesAt,
    'Corfu',
    'Split',
  );
  return {
    last,
    now,
    later: [
      { ...second, voyageId: secondId },
      { ...third, voyageId: thirdId },
    ],
    all,
  };
}
