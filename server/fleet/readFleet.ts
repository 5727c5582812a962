import type { FleetView } from '../../shared/api/fleet.ts';
import { fleetSentence } from '../../shared/rules/fleetSentence.ts';
import type { Tx } from '../db/connection.ts';
import { notFound } from '../errors.ts';
import type { Services } from '../services.ts';
import { fleetFacts } from './fleetFacts.ts';
import { fleetFigures } from './judge.ts';
import { type FleetQuery, presentDots, presentRow, sorted } from './presentFleet.ts';

/** The dealer's whole fleet at a glance, with one page of its table. */
export async function readFleet(
  services: Services,
  tx: Tx,
  given: { readonly dealerId: string | null; readonly query: FleetQuery; readonly now: Date },
): Promise<FleetView> {
  const { dealerId, query, now } = given;
  if (dealerId === null) throw notFound();
  const name = await dealerName(services, tx, dealerId);
  const vessels = await fleetFacts(services, tx, { dealerId, now });
  const figures = fleetFigures(vessels, now);
  const table = sorted(vessels, query, now);
  const from = (query.page - 1) * query.limit;
  return {
    dealer: { name },
    at: now.toISOString(),
    figures,
    sentence: fleetSentence(figures),
    networks: presentDots(vessels, now),
    vessels: table.slice(from, from + query.limit).map((vessel) => presentRow(vessel, now)),
    matching: table.length,
    page: query.page,
    limit: query.limit,
  };
}

export async function dealerName(services: Services, tx: Tx, dealerId: string): Promise<string> {
  const row = await services.db.row<{ name: string }>(tx, 'SELECT name FROM dealers WHERE id = $id', {
    id: dealerId,
  });
  if (!row) throw notFound();
  return row.name;
}
