import type { Revealed } from '../../shared/api/passphrases.ts';
import { may, printAction } from '../../shared/rules/permissions.ts';
import { requireFresh } from '../auth/requireFresh.ts';
import type { Tx } from '../db/connection.ts';
import { appendLog } from '../handovers/appendLog.ts';
import { lockLog } from '../handovers/lockLog.ts';
import { type HandoverChannel, type Holder, recordHandover } from '../handovers/recordHandover.ts';
import type { Actor } from '../http/session.ts';
import { confirmWay } from '../rotations/confirmWay.ts';
import type { Services } from '../services.ts';
import { type NetworkFacts, networkFacts, openCodes, passphrasesToTry, type ToShow } from './codesToTry.ts';

export interface Asked {
  readonly services: Services;
  readonly tx: Tx;
  readonly actor: Actor;
  readonly now: Date;
  readonly vesselId: string;
  readonly networkId: string;
}

/** Who the signed-in person is aboard: their crew entry where they have one, else their account. */
export async function holderOf(
  services: Services,
  tx: Tx,
  vesselId: string,
  personId: string,
): Promise<Holder> {
  const crew = await services.db.row<{ id: string }>(
    tx,
    'SELECT id FROM crew_members WHERE vessel_id = $vessel AND person_id = $person AND signed_off_at IS NULL',
    { vessel: vesselId, person: personId },
  );
  return crew ? { kind: 'crew', id: crew.id } : { kind: 'person', id: personId };
}

/**
 * Shows a network's passphrases to the person asking. The log line and the holder come first, in the same
 * transaction: if they cannot be written, nothing is opened. The owner's network asks for a fresh proof.
 */
export async function reveal(asked: Asked): Promise<Revealed> {
  const { services, tx, actor, vesselId, networkId, now } = asked;
  await lockLog(services, tx, vesselId);
  const network = await networkFacts(services, tx, vesselId, networkId);
  if (network.audience === 'owner') requireFresh(asked);
  const withStaged = may(actor.roles, printAction(network.audience));
  const shown = await passphrasesToTry(services, tx, { vesselId, networkId, withStaged, now });
  await writeDown(asked, shown, 'reveal');
  await countAsWay(asked, shown);
  return openCodes(services, tx, network, shown);
}

/** An officer who has looked a coming passphrase up is one of the ways aboard to learn it (D1). */
async function countAsWay(
  { services, tx, actor, vesselId, now }: Asked,
  shown: readonly ToShow[],
): Promise<void> {
  const by = { now, actor: { id: actor.personId, name: actor.name } };
  for (const { passphraseId, role } of shown) {
    if (role === 'staged' || role === 'new')
      await confirmWay(services, tx, vesselId, passphraseId, 'officer', by);
  }
}

/** The crew network's code on the person's own page. */
export async function ownCode(asked: Asked, network: NetworkFacts): Promise<Revealed> {
  const { services, tx, vesselId, networkId, now } = asked;
  await lockLog(services, tx, vesselId);
  const shown = await passphrasesToTry(services, tx, { vesselId, networkId, withStaged: false, now });
  await writeDown(asked, shown, 'own_page');
  return openCodes(services, tx, network, shown);
}

async function writeDown(
  { services, tx, actor, vesselId, networkId, now }: Asked,
  shown: readonly ToShow[],
  channel: Extract<HandoverChannel, 'reveal' | 'own_page'>,
): Promise<void> {
  const holder = await holderOf(services, tx, vesselId, actor.personId);
  await appendLog(
    services,
    tx,
    shown.map(({ passphraseId, role }) => ({
      vesselId,
      kind: channel === 'reveal' ? ('passphrase.revealed' as const) : ('handover.own_page' as const),
      at: now,
      networkId,
      passphraseId,
      subject: { kind: holder.kind, id: holder.id, name: actor.name },
      actor: { id: actor.personId, name: actor.name },
      body: { role },
    })),
  );
  for (const { passphraseId } of shown) {
    await recordHandover(services, tx, {
      vesselId,
      networkId,
      passphraseId,
      holder,
      channel,
      byPerson: actor.personId,
      at: now,
    });
  }
}
