import type { GuestView } from '../../shared/api/arrivals.ts';
import { AppError, notFound } from '../errors.ts';
import { lockLog } from '../handovers/lockLog.ts';
import type { Verb } from '../http/verb.ts';
import { viewGuest } from './guestRows.ts';
import { logThat, requireCabins, requireOrder, vesselOf } from './verb.ts';

interface StoredGuest {
  name: string | null;
  cabin_id: string | null;
  language: string;
  under_16: boolean;
  from_at: Date;
  until_at: Date;
  ashore_at: Date | null;
  erased_at: Date | null;
  party_id: string | null;
}

/** The guest's row, locked. Throws `not_found`, and `gone` for one whose entry was erased. */
export async function lockGuest(context: Verb, guestId: string): Promise<StoredGuest> {
  const { services, tx } = context;
  await lockLog(services, tx, vesselOf(context));
  const guest = await services.db.row<StoredGuest>(
    tx,
    `SELECT name, cabin_id, language, under_16, from_at, until_at, ashore_at, erased_at, party_id
     FROM guests WHERE id = $guest AND vessel_id = $vessel FOR UPDATE`,
    { guest: guestId, vessel: vesselOf(context) },
  );
  if (!guest) throw notFound();
  if (guest.erased_at)
    throw new AppError('gone', "This guest's entry was erased. Add them again if they come back.");
  return guest;
}

/** Corrects a guest's entry. What was handed over stays as it was. */
export async function editGuest(
  context: Verb,
  guestId: string,
  given: {
    readonly name?: string | null;
    readonly cabinId?: string | null;
    readonly language?: string;
    readonly under16?: boolean;
    readonly fromAt?: string;
    readonly untilAt?: string;
  },
): Promise<GuestView> {
  const { services, tx, now } = context;
  const old = await lockGuest(context, guestId);
  const next = {
    name: given.name === undefined ? old.name : given.name,
    cabin: given.cabinId === undefined ? old.cabin_id : given.cabinId,
    language: given.language ?? old.language,
    under: given.under16 ?? old.under_16,
    from: given.fromAt ? new Date(given.fromAt) : old.from_at,
    until: given.untilAt ? new Date(given.untilAt) : old.until_at,
  };
  requireOrder(next.from, next.until, given.untilAt ? 'untilAt' : 'fromAt');
  if (given.cabinId) await requireCabins(context, new Map([['cabinId', given.cabinId]]));
  await services.db.run(
    tx,
    `UPDATE guests SET name = $name, cabin_id = $cabin, language = $language, under_16 = $under, from_at = $from,
       until_at = $until, updated_at = $now WHERE id = $guest AND vessel_id = $vessel`,
    { ...next, now, guest: guestId, vessel: vesselOf(context) },
  );
  await logThat(context, {
    kind: 'guest.changed',
    subject: { kind: 'guest', id: guestId, name: next.name },
    body: { fields: Object.keys(given).sort().join(', ') },
  });
  return viewGuest(services, tx, vesselOf(context), guestId);
}

/** Takes a guest off the list who was given nothing; anybody else knows a passphrase and is marked ashore instead. */
export async function removeGuest(context: Verb, guestId: string): Promise<{ id: string }> {
  const { services, tx } = context;
  await lockGuest(context, guestId);
  const bind = { guest: guestId, vessel: vesselOf(context) };
  const given = await services.db.row(
    tx,
    "SELECT 1 FROM handovers WHERE vessel_id = $vessel AND holder_kind = 'guest' AND holder_id = $guest AND undone_at IS NULL LIMIT 1",
    bind,
  );
  if (given) {
    throw new AppError(
      'conflict',
      'This guest was given a passphrase, so the entry stays. Mark them ashore instead.',
    );
  }
  await services.db.run(tx, 'DELETE FROM guests WHERE id = $guest AND vessel_id = $vessel', bind);
  await logThat(context, {
    kind: 'guest.changed',
    subject: { kind: 'guest', id: guestId },
    body: { removed: true },
  });
  return { id: guestId };
}
