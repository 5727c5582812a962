import { randomUUID } from 'node:crypto';
import { earlier, minutes } from './calendar.ts';
import { layHandover } from './holdings.ts';
import { type Given, type LaidVessel, type Laying, networkOf } from './laying.ts';
import type { LaidGuest } from './parties.ts';

/** Serial of the first card printed for today's party. */
export const FIRST_SERIAL = 1182;

/** A card for each guest, printed when the network had changed; two handed over, one code shown on a screen. */
export function layCards(
  laying: Laying,
  vessel: LaidVessel,
  guests: readonly LaidGuest[],
  times: { changed: Date; handed: readonly Date[] },
): void {
  const { rows, log, now } = laying;
  const network = networkOf(vessel, 'guest');
  const printedAt = minutes(times.changed, 20);
  const printed = earlier(printedAt, minutes(now, -20));
  guests.forEach((guest, index) => {
    const card = { id: randomUUID(), serial: `M-${FIRST_SERIAL + index}` };
    const handed = times.handed[index] ?? null;
    const byCard = handed !== null && index < 2;
    rows.add('cards', {
      id: card.id,
      vessel_id: vessel.id,
      network_id: network.id,
      passphrase_id: network.passphraseId,
      serial: card.serial,
      format: 'wallet',
      language: guest.language,
      guest_id: guest.id,
      state: byCard ? 'handed_over' : 'printed',
      printed_at: printed,
      handed_over_at: byCard ? handed : null,
    });
    log.push({
      vesselId: vessel.id,
      kind: 'card.printed',
      at: printed,
      networkId: network.id,
      passphraseId: network.passphraseId,
      subject: { kind: 'card', id: card.id },
      body: { serial: card.serial, format: 'wallet', language: guest.language },
    });
    if (handed === null) return;
    const given: Given = {
      kind: 'guest',
      id: guest.id,
      name: guest.name,
      label: guest.label,
      channel: 'screen',
      at: handed,
    };
    layHandover(laying, vessel, network, byCard ? { ...given, channel: 'card', card } : given);
  });
}

/** The captain, who gave it to three of the crew: all of them still aboard. */
export function layOwnerHoldings(laying: Laying, vessel: LaidVessel): void {
  const network = networkOf(vessel, 'owner');
  const trusted = ['Captain', 'ETO', 'Chief stew', 'First officer'];
  const holders = vessel.crew.filter((member) => trusted.includes(member.position));
  for (const [index, member] of holders.entries()) {
    layHandover(laying, vessel, network, {
      kind: 'crew',
      id: member.id,
      name: member.name,
      channel: 'reveal',
      at: minutes(network.liveAt, 15 + index * 20),
    });
  }
}

/** The captain's own plan: after the owner's trip, long before the age limit. */
export function layOwnersChange(
  laying: Laying,
  vessel: LaidVessel,
  dueAt: Date,
): { id: string; networkId: string } {
  const network = networkOf(vessel, 'owner');
  const id = randomUUID();
  laying.rows.add('rotations', {
    id,
    vessel_id: vessel.id,
    network_id: network.id,
    state: 'planned',
    mode: 'graceful',
    driver: vessel.plan.driver,
    epoch: 1,
    planned_by: 'person',
    reasons: [{ code: 'person', why: 'routine' }],
    due_at: dueAt,
    deadline_at: new Date(network.liveAt.getTime() + network.limitDays * 86_400_000),
    created_at: minutes(laying.now, -2 * 1440),
    updated_at: laying.now,
  });
  return { id, networkId: network.id };
}
