import { randomUUID } from 'node:crypto';
import type { PartyView } from '../../shared/api/arrivals.ts';
import { invalid, notFound } from '../errors.ts';
import { lockLog } from '../handovers/lockLog.ts';
import type { Verb } from '../http/verb.ts';
import { replanVessel } from '../vessels/changeVessel.ts';
import { viewParty } from './parties.ts';
import { logThat, requireOrder, vesselOf } from './verb.ts';

export interface NewParty {
  readonly name: string;
  readonly arrivesAt: string;
  readonly leavesAt: string;
  readonly voyageId: string | null;
}

/** Adds a party; the plans of the vessel's networks follow. */
export async function createParty(context: Verb, given: NewParty): Promise<PartyView> {
  await lockLog(context.services, context.tx, vesselOf(context));
  const id = await addParty(context, given, '');
  return viewParty(context.services, context.tx, vesselOf(context), id);
}

/** As {@link createParty} with the log's head locked already; `path` is where the party's fields are in the request. */
export async function addParty(context: Verb, given: NewParty, path: string): Promise<string> {
  const { services, tx, now } = context;
  const vesselId = vesselOf(context);
  const [arrives, leaves] = [new Date(given.arrivesAt), new Date(given.leavesAt)];
  requireOrder(arrives, leaves, `${path}leavesAt`);
  await requireVoyage(context, given.voyageId, `${path}voyageId`);
  const id = randomUUID();
  await services.db.run(
    tx,
    `INSERT INTO parties(id, vessel_id, voyage_id, name, arrives_at, leaves_at, created_at, updated_at)
     VALUES ($id, $vessel, $voyage, $name, $arrives, $leaves, $now, $now)`,
    { id, vessel: vesselId, voyage: given.voyageId, name: given.name, arrives, leaves, now },
  );
  await logThat(context, { kind: 'party.added', body: { partyId: id } });
  await replanVessel({ services, tx, vesselId, now });
  return id;
}

/**
 * Corrects a party. Guests whose times were the party's move with it; a guest with times of their own that
 * would no longer fit is named, and nothing changes.
 */
export async function editParty(
  context: Verb,
  partyId: string,
  given: Partial<NewParty>,
): Promise<PartyView> {
  const { services, tx, now } = context;
  const vesselId = vesselOf(context);
  await lockLog(services, tx, vesselId);
  const old = await services.db.row<{
    name: string;
    arrives_at: Date;
    leaves_at: Date;
    voyage_id: string | null;
  }>(
    tx,
    'SELECT name, arrives_at, leaves_at, voyage_id FROM parties WHERE id = $party AND vessel_id = $vessel FOR UPDATE',
    { party: partyId, vessel: vesselId },
  );
  if (!old) throw notFound();
  const arrives = given.arrivesAt ? new Date(given.arrivesAt) : old.arrives_at;
  const leaves = given.leavesAt ? new Date(given.leavesAt) : old.leaves_at;
  const voyage = given.voyageId === undefined ? old.voyage_id : given.voyageId;
  requireOrder(arrives, leaves, given.leavesAt ? 'leavesAt' : 'arrivesAt');
  if (given.voyageId) await requireVoyage(context, given.voyageId, 'voyageId');
  const times = {
    party: partyId,
    vessel: vesselId,
    oldFrom: old.arrives_at,
    oldUntil: old.leaves_at,
    from: arrives,
    until: leaves,
  };
  await requireGuestsFit(context, times);
  await services.db.run(
    tx,
    `UPDATE guests SET from_at = ${NEW_FROM}, until_at = ${NEW_UNTIL}, updated_at = $now
     WHERE party_id = $party AND vessel_id = $vessel AND ashore_at IS NULL`,
    { ...times, now },
  );
  await services.db.run(
    tx,
    `UPDATE parties SET name = $name, arrives_at = $from, leaves_at = $until, voyage_id = $voyage, updated_at = $now
     WHERE id = $party AND vessel_id = $vessel`,
    {
      party: partyId,
      vessel: vesselId,
      name: given.name ?? old.name,
      from: arrives,
      until: leaves,
      voyage,
      now,
    },
  );
  await logThat(context, {
    kind: 'party.changed',
    body: { partyId, fields: Object.keys(given).sort().join(', ') },
  });
  await replanVessel({ services, tx, vesselId, now });
  return viewParty(services, tx, vesselId, partyId);
}

const NEW_FROM = 'CASE WHEN from_at = $oldFrom THEN $from::timestamptz ELSE from_at END';
const NEW_UNTIL = 'CASE WHEN until_at = $oldUntil THEN $until::timestamptz ELSE until_at END';

async function requireGuestsFit({ services, tx }: Verb, times: Record<string, unknown>): Promise<void> {
  const misfit = await services.db.row<{ who: string }>(
    tx,
    `SELECT coalesce(name, label) AS who FROM guests WHERE party_id = $party AND vessel_id = $vessel AND ashore_at IS NULL
       AND ${NEW_UNTIL} <= ${NEW_FROM} ORDER BY position LIMIT 1`,
    times,
  );
  if (misfit) {
    throw invalid({
      arrivesAt: [`${misfit.who} has times of their own that would not fit. Correct that guest first.`],
    });
  }
}

async function requireVoyage({ services, tx, actor }: Verb, voyageId: string | null, field: string) {
  if (voyageId === null) return;
  const known = await services.db.row(tx, 'SELECT 1 FROM voyages WHERE id = $id AND vessel_id = $vessel', {
    id: voyageId,
    vessel: actor.vesselId,
  });
  if (!known) throw invalid({ [field]: ["Choose a stretch of this vessel's calendar"] });
}
