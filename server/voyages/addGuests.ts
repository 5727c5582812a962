import { randomUUID } from 'node:crypto';
import type { z } from 'zod';
import type { GuestView, guestRow } from '../../shared/api/arrivals.ts';
import { invalid, notFound } from '../errors.ts';
import { lockLog } from '../handovers/lockLog.ts';
import type { Verb } from '../http/verb.ts';
import { addParty, type NewParty } from './editParties.ts';
import { viewGuest } from './guestRows.ts';
import { logThat, requireCabins, requireOrder, vesselOf } from './verb.ts';

type Row = z.output<typeof guestRow>;

interface Times {
  readonly arrives_at: Date;
  readonly leaves_at: Date;
}

/** Adds one guest at the end of a party's list. */
export async function addGuest(context: Verb, given: Row & { readonly partyId: string }): Promise<GuestView> {
  const { services, tx } = context;
  await lockLog(services, tx, vesselOf(context));
  const party = await partyTimes(context, given.partyId);
  const [id = ''] = await writeGuests(context, {
    partyId: given.partyId,
    party,
    rows: [given],
    path: () => '',
  });
  await logThat(context, { kind: 'guest.added', subject: { kind: 'guest', id, name: given.name } });
  return viewGuest(services, tx, vesselOf(context), id);
}

/** Adds the lines somebody confirmed; each is checked again, and one wrong line stores none. */
export async function importList(
  context: Verb,
  given: { readonly partyId?: string; readonly newParty?: NewParty; readonly rows: readonly Row[] },
): Promise<{ partyId: string; added: number }> {
  const { services, tx } = context;
  await lockLog(services, tx, vesselOf(context));
  const partyId = given.newParty
    ? await addParty(context, given.newParty, 'newParty.')
    : (given.partyId ?? '');
  const party = await partyTimes(context, partyId);
  const ids = await writeGuests(context, {
    partyId,
    party,
    rows: given.rows,
    path: (index) => `rows.${index}.`,
  });
  await logThat(context, { kind: 'guest.imported', body: { guests: ids.length, partyId } });
  return { partyId, added: ids.length };
}

/** The longest a visit is taken for: 31 days, in milliseconds. Common practice, no source. */
const VISIT_MAX_MS = 31 * 86_400_000;

/** Adds somebody who is on no list. */
export async function addVisitor(
  context: Verb,
  given: {
    readonly name: string | null;
    readonly language: string;
    readonly under16: boolean;
    readonly fromAt: string | null;
    readonly untilAt: string;
  },
): Promise<GuestView> {
  const { services, tx, now } = context;
  if (new Date(given.untilAt).getTime() <= now.getTime())
    throw invalid({ untilAt: ['Choose an end time that is still to come'] });
  if (new Date(given.untilAt).getTime() > now.getTime() + VISIT_MAX_MS)
    throw invalid({ untilAt: ['A visit ends within a month. For a longer stay add them to a party'] });
  await lockLog(services, tx, vesselOf(context));
  const [id = ''] = await writeGuests(context, {
    partyId: null,
    party: { arrives_at: now, leaves_at: new Date(given.untilAt) },
    rows: [{ ...given, cabinId: null, language: given.language as Row['language'] }],
    path: () => '',
  });
  await logThat(context, {
    kind: 'visitor.added',
    subject: { kind: 'guest', id, name: given.name },
    body: { until: given.untilAt },
  });
  return viewGuest(services, tx, vesselOf(context), id);
}

async function partyTimes({ services, tx, actor }: Verb, partyId: string): Promise<Times> {
  const party = await services.db.row<Times & { ashore_at: Date | null }>(
    tx,
    'SELECT arrives_at, leaves_at, ashore_at FROM parties WHERE id = $party AND vessel_id = $vessel FOR UPDATE',
    { party: partyId, vessel: actor.vesselId },
  );
  if (!party) throw notFound();
  if (party.ashore_at)
    throw invalid({
      partyId: ['This party is ashore. Choose another one, or add a visitor with an end time.'],
    });
  return party;
}

interface Writing {
  /** Null for visitors. */
  readonly partyId: string | null;
  readonly party: Times;
  readonly rows: readonly Row[];
  /** Where a line's fields are in the request, for its errors. */
  readonly path: (index: number) => string;
}

async function writeGuests(context: Verb, { partyId, party, rows, path }: Writing): Promise<string[]> {
  const { services, tx, actor, now } = context;
  const cabins = new Map<string, string>();
  const errors: Record<string, string[]> = {};
  const stays = rows.map((row, index) => {
    if (row.cabinId !== null) cabins.set(`${path(index)}cabinId`, row.cabinId);
    const from = row.fromAt ? new Date(row.fromAt) : party.arrives_at;
    const until = row.untilAt ? new Date(row.untilAt) : party.leaves_at;
    try {
      requireOrder(from, until, `${path(index)}untilAt`);
    } catch {
      errors[`${path(index)}untilAt`] = ['This must be later than the time the guest comes aboard'];
    }
    return { from, until };
  });
  if (Object.keys(errors).length > 0) throw invalid(errors);
  await requireCabins(context, cabins);
  const last = await services.db.row<{ next: number }>(
    tx,
    'SELECT coalesce(max(position) + 1, 0) AS next FROM guests WHERE vessel_id = $vessel AND party_id IS NOT DISTINCT FROM $party::uuid',
    { vessel: actor.vesselId, party: partyId },
  );
  const first = last?.next ?? 0;
  const written = rows.map((row, index) => ({
    id: randomUUID(),
    vessel_id: actor.vesselId,
    party_id: partyId,
    cabin_id: row.cabinId,
    name: row.name,
    label: `${partyId === null ? 'Visitor' : 'Guest'} ${first + index + 1}`,
    language: row.language,
    under_16: row.under16,
    from_at: stays[index]?.from ?? now,
    until_at: stays[index]?.until ?? now,
    position: first + index,
    created_at: now,
    updated_at: now,
  }));
  await services.db.run(
    tx,
    `INSERT INTO guests(id, vessel_id, party_id, cabin_id, name, label, language, under_16, from_at, until_at, position, created_at, updated_at)
     SELECT id, vessel_id, party_id, cabin_id, name, label, language, under_16, from_at, until_at, position, created_at, updated_at
     FROM jsonb_populate_recordset(NULL::guests, $rows::jsonb)`,
    { rows: JSON.stringify(written) },
  );
  return written.map(({ id }) => id);
}
