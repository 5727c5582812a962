import { randomUUID } from 'node:crypto';
import type { VoyageKind } from '../../shared/api/common.ts';
import type { VoyageForm, VoyageList, VoyageView } from '../../shared/api/voyages.ts';
import { may } from '../../shared/rules/permissions.ts';
import { zoneAt } from '../../shared/rules/shipTime.ts';
import { VOYAGE_KIND_NAMES } from '../../shared/rules/voyageKinds.ts';
import { notFound } from '../errors.ts';
import { lockLog } from '../handovers/lockLog.ts';
import type { Verb } from '../http/verb.ts';
import { replanVessel } from '../vessels/changeVessel.ts';
import { shipZones } from '../vessels/readVessel.ts';
import { logThat, requireOrder, vesselOf } from './verb.ts';

const YEAR_MS = 365 * 86_400_000;

interface Row {
  id: string;
  kind: VoyageKind;
  title: string;
  starts_at: Date;
  ends_at: Date;
  from_port: string | null;
  to_port: string | null;
}
const COLUMNS = 'id, kind, title, starts_at, ends_at, from_port, to_port';

/** The calendar; from a year ago to two years ahead unless asked otherwise. */
export async function listVoyages(
  context: Verb,
  asked: { readonly from?: string; readonly to?: string },
): Promise<VoyageList> {
  const { services, tx, now } = context;
  const vessel = vesselOf(context);
  const rows = await services.db.rows<Row>(
    tx,
    `SELECT ${COLUMNS} FROM voyages WHERE vessel_id = $vessel AND ends_at > $from AND starts_at < $to
     ORDER BY starts_at, id LIMIT 500`,
    {
      vessel,
      from: asked.from ? new Date(asked.from) : new Date(now.getTime() - YEAR_MS),
      to: asked.to ? new Date(asked.to) : new Date(now.getTime() + 2 * YEAR_MS),
    },
  );
  return {
    zone: zoneAt(await shipZones(services, tx, vessel), now),
    voyages: rows.map((row) => present(context, row)),
  };
}

/** Adds a stretch to the calendar; every network's plan looks again. */
export async function createVoyage(context: Verb, given: VoyageForm): Promise<VoyageView> {
  requireOrder(new Date(given.startsAt), new Date(given.endsAt), 'endsAt');
  await lockLog(context.services, context.tx, vesselOf(context));
  return store(context, randomUUID(), given, 'added');
}

/** Changes a stretch; every network's plan looks again. */
export async function editVoyage(
  context: Verb,
  voyageId: string,
  given: Partial<VoyageForm>,
): Promise<VoyageView> {
  const { services, tx } = context;
  await lockLog(services, tx, vesselOf(context));
  const old = await services.db.row<Row>(
    tx,
    `SELECT ${COLUMNS} FROM voyages WHERE id = $id AND vessel_id = $vessel FOR UPDATE`,
    { id: voyageId, vessel: vesselOf(context) },
  );
  if (!old) throw notFound();
  const next: VoyageForm = {
    kind: given.kind ?? old.kind,
    title: given.title ?? old.title,
    startsAt: given.startsAt ?? old.starts_at.toISOString(),
    endsAt: given.endsAt ?? old.ends_at.toISOString(),
    fromPort: given.fromPort === undefined ? old.from_port : given.fromPort,
    toPort: given.toPort === undefined ? old.to_port : given.toPort,
  };
  requireOrder(new Date(next.startsAt), new Date(next.endsAt), given.endsAt ? 'endsAt' : 'startsAt');
  return store(context, voyageId, next, 'changed');
}

/** Takes a stretch off the calendar. Its parties stay, without it. */
export async function deleteVoyage(context: Verb, voyageId: string): Promise<{ id: string }> {
  const { services, tx, now } = context;
  const vesselId = vesselOf(context);
  await lockLog(services, tx, vesselId);
  const gone = await services.db.run<{ kind: VoyageKind }>(
    tx,
    'DELETE FROM voyages WHERE id = $id AND vessel_id = $vessel RETURNING kind',
    { id: voyageId, vessel: vesselId },
  );
  const [voyage] = gone;
  if (!voyage) throw notFound();
  await logThat(context, { kind: 'voyage.changed', body: { what: 'removed', voyage: voyage.kind } });
  await replanVessel({ services, tx, vesselId, now });
  return { id: voyageId };
}

async function store(
  context: Verb,
  id: string,
  given: VoyageForm,
  what: 'added' | 'changed',
): Promise<VoyageView> {
  const { services, tx, now } = context;
  const vesselId = vesselOf(context);
  const [row] = await services.db.run<Row>(
    tx,
    `INSERT INTO voyages(id, vessel_id, kind, title, starts_at, ends_at, from_port, to_port, created_at, updated_at)
     VALUES ($id, $vessel, $kind, $title, $starts, $ends, $from, $to, $now, $now)
     ON CONFLICT (id) DO UPDATE SET kind = excluded.kind, title = excluded.title, starts_at = excluded.starts_at,
       ends_at = excluded.ends_at, from_port = excluded.from_port, to_port = excluded.to_port, updated_at = $now
     RETURNING ${COLUMNS}`,
    {
      id,
      vessel: vesselId,
      kind: given.kind,
      title: given.title,
      starts: new Date(given.startsAt),
      ends: new Date(given.endsAt),
      from: given.fromPort,
      to: given.toPort,
      now,
    },
  );
  if (!row) throw notFound();
  await logThat(context, {
    kind: 'voyage.changed',
    body: {
      what,
      voyage: given.kind,
      startsAt: row.starts_at.toISOString(),
      endsAt: row.ends_at.toISOString(),
    },
  });
  await replanVessel({ services, tx, vesselId, now });
  return present(context, row);
}

const present = ({ actor }: Verb, row: Row): VoyageView => ({
  id: row.id,
  kind: row.kind,
  title: may(actor.roles, 'arrivals.view') ? row.title : VOYAGE_KIND_NAMES[row.kind],
  startsAt: row.starts_at.toISOString(),
  endsAt: row.ends_at.toISOString(),
  fromPort: row.from_port,
  toPort: row.to_port,
});
