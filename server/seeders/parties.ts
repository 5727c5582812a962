import { randomUUID } from 'node:crypto';
import { earlier, minutes } from './calendar.ts';
import type { LaidVessel, Laying } from './laying.ts';

export interface GuestPlan {
  /** Null where the guest asked to be listed without one. */
  readonly name: string | null;
  readonly language: string;
  readonly under16?: boolean;
  readonly cabinId: string | null;
}

export interface PartyPlan {
  readonly name: string;
  readonly voyageId: string | null;
  readonly arrivesAt: Date;
  readonly leavesAt: Date;
  readonly ashoreAt: Date | null;
  readonly guests: readonly GuestPlan[];
}

export interface LaidGuest extends GuestPlan {
  readonly id: string;
  readonly label: string;
}

export interface LaidParty extends Omit<PartyPlan, 'guests'> {
  readonly id: string;
  readonly guests: readonly LaidGuest[];
}

/** A party and its guests, listed three days before they come. */
export function layParty({ rows, log, now }: Laying, vessel: LaidVessel, plan: PartyPlan): LaidParty {
  const id = randomUUID();
  const listedAt = earlier(minutes(plan.arrivesAt, -3 * 1440), minutes(now, -60));
  rows.add('parties', {
    id,
    vessel_id: vessel.id,
    voyage_id: plan.voyageId,
    name: plan.name,
    arrives_at: plan.arrivesAt,
    leaves_at: plan.leavesAt,
    ashore_at: plan.ashoreAt,
    created_at: listedAt,
    updated_at: listedAt,
  });
  const guests = plan.guests.map((guest, position): LaidGuest => {
    const laid = { ...guest, id: randomUUID(), label: `Guest ${position + 1}` };
    rows.add('guests', {
      id: laid.id,
      vessel_id: vessel.id,
      party_id: id,
      cabin_id: guest.cabinId,
      name: guest.name,
      label: laid.label,
      language: guest.language,
      under_16: guest.under16 ?? false,
      from_at: plan.arrivesAt,
      until_at: plan.leavesAt,
      ashore_at: plan.ashoreAt,
      position,
      created_at: listedAt,
      updated_at: listedAt,
    });
    return laid;
  });
  if (guests.length > 0) {
    log.push({ vesselId: vessel.id, kind: 'guest.imported', at: listedAt, body: { guests: guests.length } });
  }
  return { ...plan, id, guests };
}
