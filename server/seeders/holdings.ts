import { randomUUID } from 'node:crypto';
import type { LaidNetwork, LaidVessel, Laying } from './layVessel.ts';

type Channel = 'card' | 'screen' | 'own_page' | 'reveal';

export interface Given {
  readonly kind: 'guest' | 'crew';
  readonly id: string;
  readonly name: string | null;
  readonly label?: string;
  readonly channel: Channel;
  readonly at: Date;
  readonly departedAt?: Date | null;
  readonly card?: { readonly id: string; readonly serial: string };
  readonly by?: { readonly id: string; readonly name: string } | null;
}

const LOG_KIND = {
  card: 'handover.card',
  screen: 'handover.screen',
  own_page: 'handover.own_page',
  reveal: 'passphrase.revealed',
} as const;

/** Somebody was given a network's passphrase in force: the receipt, who holds it, and the log's line. */
export function layHandover(
  { rows, log }: Laying,
  vessel: LaidVessel,
  network: LaidNetwork,
  given: Given,
): void {
  rows.add('handovers', {
    id: randomUUID(),
    vessel_id: vessel.id,
    network_id: network.id,
    passphrase_id: network.passphraseId,
    holder_kind: given.kind,
    holder_id: given.id,
    channel: given.channel,
    card_id: given.card?.id ?? null,
    by_person: given.by?.id ?? null,
    at: given.at,
    undone_at: null,
  });
  rows.add('holders', {
    passphrase_id: network.passphraseId,
    holder_kind: given.kind,
    holder_id: given.id,
    vessel_id: vessel.id,
    network_id: network.id,
    since: given.at,
    through: given.channel,
    departed_at: given.departedAt ?? null,
  });
  log.push({
    vesselId: vessel.id,
    kind: LOG_KIND[given.channel],
    at: given.at,
    networkId: network.id,
    passphraseId: network.passphraseId,
    subject: { kind: given.kind, id: given.id, name: given.name ?? given.label ?? null },
    actor: given.by ?? null,
    body: given.card
      ? { audience: network.audience, serial: given.card.serial }
      : { audience: network.audience },
  });
}

/** The whole crew reads the crew network's code on their own pages within two days of its change. */
export function layCrewHoldings(laying: Laying, vessel: LaidVessel, network: LaidNetwork): void {
  for (const [index, member] of vessel.crew.entries()) {
    const read = new Date(network.liveAt.getTime() + (20 + index * 47) * 60_000);
    const signedOn = vessel.calendar.aged(member.signedOnDays, '09:00');
    const latest = member.signedOffAt ?? laying.now;
    const at = new Date(Math.min(Math.max(read.getTime(), signedOn.getTime()), latest.getTime()));
    // Signed off before this passphrase came into force: never held it.
    if (member.signedOffAt && member.signedOffAt.getTime() <= network.liveAt.getTime()) continue;
    layHandover(laying, vessel, network, {
      kind: 'crew',
      id: member.id,
      name: member.name,
      channel: index % 3 === 0 ? 'screen' : 'own_page',
      at,
      departedAt: member.signedOffAt ?? null,
    });
  }
}
