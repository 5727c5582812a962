import type { GuestView } from '../../shared/api/arrivals.ts';
import { AppError } from '../errors.ts';
import { markBack, markDeparted } from '../handovers/holders.ts';
import type { Verb } from '../http/verb.ts';
import { replanNetwork } from '../rotations/replan.ts';
import { replanVessel } from '../vessels/changeVessel.ts';
import { lockGuest } from './editGuest.ts';
import { viewGuest } from './guestRows.ts';
import { logThat, vesselOf } from './verb.ts';

/** Marks a guest as gone. What they hold is exposed from now on, and the plans look again. A repeat changes nothing. */
export async function guestAshore(context: Verb, guestId: string): Promise<GuestView> {
  const { services, tx, now } = context;
  const vesselId = vesselOf(context);
  const guest = await lockGuest(context, guestId);
  if (guest.ashore_at === null) {
    await services.db.run(
      tx,
      'UPDATE guests SET ashore_at = $now, updated_at = $now WHERE id = $guest AND vessel_id = $vessel',
      { now, guest: guestId, vessel: vesselId },
    );
    await logThat(context, {
      kind: 'guest.ashore',
      subject: { kind: 'guest', id: guestId, name: guest.name },
    });
    const exposed = await markDeparted(services, tx, { vesselId, kind: 'guest', ids: [guestId] }, now);
    for (const networkId of exposed) await replanNetwork(services, tx, networkId, now);
  }
  return viewGuest(services, tx, vesselId, guestId);
}

/** Marks a guest as aboard again; a party that was marked ashore as a whole is not ashore any more. */
export async function guestBack(context: Verb, guestId: string): Promise<GuestView> {
  const { services, tx, now } = context;
  const vesselId = vesselOf(context);
  const guest = await lockGuest(context, guestId);
  if (guest.ashore_at !== null) {
    if (guest.until_at.getTime() <= now.getTime()) {
      throw new AppError(
        'not_now',
        "This guest's time aboard is over. Give them a later end time first, then mark them back.",
      );
    }
    const bind = { now, guest: guestId, vessel: vesselId };
    await services.db.run(
      tx,
      'UPDATE guests SET ashore_at = NULL, updated_at = $now WHERE id = $guest AND vessel_id = $vessel',
      bind,
    );
    await services.db.run(
      tx,
      'UPDATE parties SET ashore_at = NULL, updated_at = $now WHERE id = $party::uuid AND vessel_id = $vessel AND ashore_at IS NOT NULL',
      { now, party: guest.party_id, vessel: vesselId },
    );
    await logThat(context, { kind: 'guest.back', subject: { kind: 'guest', id: guestId, name: guest.name } });
    await markBack(services, tx, { vesselId, kind: 'guest', ids: [guestId] });
    await replanVessel({ services, tx, vesselId, now });
  }
  return viewGuest(services, tx, vesselId, guestId);
}
