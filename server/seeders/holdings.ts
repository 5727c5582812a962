import { markDeparted } from '../handovers/holders.ts';
import { recordHandover } from '../handovers/recordHandover.ts';
import type { Given, LaidNetwork, LaidVessel, Laying } from './laying.ts';

const LOG_KIND = {
  card: 'handover.card',
  screen: 'handover.screen',
  own_page: 'handover.own_page',
  reveal: 'passphrase.revealed',
} as const;

/** Somebody was given a network's passphrase in force: the receipt, who holds it, and the log's line. */
export function layHandover(
  { handovers, log }: Laying,
  vessel: LaidVessel,
  network: LaidNetwork,
  given: Given,
): void {
  handovers.push({
    ...given,
    vesselId: vessel.id,
    networkId: network.id,
    passphraseId: network.passphraseId,
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

/** Writes the handovers down by the code that writes everybody's, and then who has left since. */
export async function writeHandovers({ services, tx, handovers }: Laying): Promise<void> {
  for (const given of handovers) {
    await recordHandover(services, tx, {
      vesselId: given.vesselId,
      networkId: given.networkId,
      passphraseId: given.passphraseId,
      holder: { kind: given.kind, id: given.id },
      channel: given.channel,
      cardId: given.card?.id ?? null,
      byPerson: given.by?.id ?? null,
      at: given.at,
    });
  }
  for (const { departedAt, vesselId, kind, id } of handovers) {
    if (departedAt) await markDeparted(services, tx, { vesselId, kind, ids: [id] }, departedAt);
  }
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
