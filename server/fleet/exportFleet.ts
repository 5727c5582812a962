import { AUDIENCE_NAMES } from '../../shared/rules/permissions.ts';
import type { Tx } from '../db/connection.ts';
import { notFound } from '../errors.ts';
import { type CsvCell, csvText } from '../http/csv.ts';
import type { FileReply } from '../http/reply.ts';
import type { Services } from '../services.ts';
import { fleetFacts, type NetworkFacts, type VesselFacts } from './fleetFacts.ts';
import { ageDays, guessWords, nextChangeOf, pastLimit, standingOf } from './judge.ts';

const HEADING = [
  'Vessel',
  'Network',
  'Audience',
  'Age, days',
  'Limit, days',
  'Past limit',
  'Standing',
  'Passphrase',
  'Left, still holding',
  'Lost cards and leaks',
  'Next change, UTC',
  'Next change',
  "Ship's time zone",
  'Boat last heard, UTC',
] as const;

const STANDING_WORDS = { in_order: 'In order', due: 'Due', overdue: 'Overdue', exposed: 'Exposed' } as const;

/** One line a network, in the order of the vessels' names; a vessel without networks has one line of its own. */
export async function exportFleet(
  services: Services,
  tx: Tx,
  given: { readonly dealerId: string | null; readonly now: Date },
): Promise<FileReply> {
  const { dealerId, now } = given;
  if (dealerId === null) throw notFound();
  const vessels = await fleetFacts(services, tx, { dealerId, now });
  const rows = vessels.flatMap((vessel) =>
    vessel.networks.length === 0
      ? [[vessel.name, ...Array.from({ length: HEADING.length - 1 }, () => null)]]
      : vessel.networks.map((network) => line(vessel, network, now)),
  );
  return {
    contentType: 'text/csv; charset=utf-8',
    filename: `fleet-${now.toISOString().slice(0, 10)}.csv`,
    body: csvText(HEADING, rows),
  };
}

function line(vessel: VesselFacts, network: NetworkFacts, now: Date): CsvCell[] {
  const age = ageDays(network, now);
  const change = nextChangeOf(network);
  return [
    vessel.name,
    network.ssid,
    AUDIENCE_NAMES[network.audience],
    age === null ? null : Math.floor(age),
    network.limitDays,
    pastLimit(network, now) ? 'yes' : 'no',
    STANDING_WORDS[standingOf(network, now)],
    guessWords(network),
    network.departed,
    network.leaks,
    change.kind === 'due' ? (change.dueAt?.toISOString() ?? null) : null,
    change.words || 'planned',
    vessel.zone,
    vessel.lastHeardAt?.toISOString() ?? null,
  ];
}
