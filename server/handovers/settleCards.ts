import { randomUUID } from 'node:crypto';
import type { Verb } from '../http/verb.ts';
import { appendLog } from './appendLog.ts';

export interface KnownCard {
  readonly id: string;
  readonly serial: string;
  readonly state: 'printed' | 'handed_over' | 'returned' | 'lost' | 'void';
  readonly networkId: string;
  readonly passphraseId: string;
  /** True when the passphrase on it no longer works. */
  readonly retired: boolean;
}

/**
 * Writes down cards as returned or lost. A lost card leaks the passphrase on it while that one still works.
 * A void card, and one settled before, stays as it is. Answers the networks a loss exposed; the caller looks at
 * their plans again.
 */
export async function settleCards(
  { services, tx, actor, now }: Verb,
  settled: readonly { readonly card: KnownCard; readonly to: 'returned' | 'lost' }[],
): Promise<string[]> {
  const vesselId = actor.vesselId ?? '';
  const open = settled.filter(({ card }) => card.state === 'printed' || card.state === 'handed_over');
  const exposed = new Set<string>();
  for (const { card, to } of open) {
    await services.db.run(
      tx,
      'UPDATE cards SET state = $to, ended_at = $now WHERE id = $card AND vessel_id = $vessel',
      { to, now, card: card.id, vessel: vesselId },
    );
    if (to === 'returned' || card.retired) continue;
    await services.db.run(
      tx,
      `INSERT INTO leaks(id, vessel_id, network_id, passphrase_id, kind, card_id, at, by_person)
       VALUES ($id, $vessel, $network, $passphrase, 'lost_card', $card, $now, $by)`,
      {
        id: randomUUID(),
        vessel: vesselId,
        network: card.networkId,
        passphrase: card.passphraseId,
        card: card.id,
        now,
        by: actor.personId,
      },
    );
    exposed.add(card.networkId);
  }
  await appendLog(
    services,
    tx,
    open.map(({ card, to }) => ({
      vesselId,
      kind: to === 'lost' ? 'card.lost' : 'card.returned',
      at: now,
      networkId: card.networkId,
      passphraseId: card.passphraseId,
      subject: { kind: 'card', id: card.id },
      actor: { id: actor.personId, name: actor.name },
      body: { serial: card.serial },
    })),
  );
  return [...exposed];
}
