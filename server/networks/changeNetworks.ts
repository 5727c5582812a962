import { randomUUID } from 'node:crypto';
import type { NetworkBody, Policy } from '../../shared/api/networks.ts';
import { GENERATED_BITS_MIN, NETWORKS_MAX } from '../../shared/rules/limits.ts';
import type { Audience } from '../../shared/rules/permissions.ts';
import { AppError, invalid, notFound } from '../errors.ts';
import { appendLog, type LogEvent } from '../handovers/appendLog.ts';
import { lockLog } from '../handovers/lockLog.ts';
import { refuseInNote } from '../passphrases/refuseInNote.ts';
import { voidCards } from '../rotations/comeIntoForce.ts';
import { lockNetwork } from '../rotations/lockRotation.ts';
import { replanNetwork } from '../rotations/replan.ts';
import type { Change } from '../vessels/change.ts';

/**
 * Rules a new network starts with, by its audience. Guests change after every party and at the latest in a
 * fortnight; crew every 45 days at night and when somebody signs off; the owner once a year. Common practice, no source.
 */
const STARTING: Record<Audience, Policy> = {
  owner: {
    ageLimitDays: 365,
    leastBits: GENERATED_BITS_MIN,
    words: 5,
    quietHours: [],
    onPartyDeparture: false,
    onSignOff: true,
    onLostCard: true,
    onLeak: true,
  },
  guest: {
    ageLimitDays: 14,
    leastBits: GENERATED_BITS_MIN,
    words: 5,
    quietHours: [],
    onPartyDeparture: true,
    onSignOff: false,
    onLostCard: true,
    onLeak: true,
  },
  crew: {
    ageLimitDays: 45,
    leastBits: GENERATED_BITS_MIN,
    words: 5,
    quietHours: [{ days: [1, 2, 3, 4, 5, 6, 7], from: '10:00', to: '11:30' }],
    onPartyDeparture: false,
    onSignOff: true,
    onLostCard: true,
    onLeak: true,
  },
};

export const log = (
  { services, tx, vesselId, actor, now }: Change,
  event: Pick<LogEvent, 'kind' | 'networkId' | 'passphraseId' | 'body'>,
) =>
  appendLog(services, tx, [{ vesselId, at: now, actor: { id: actor.personId, name: actor.name }, ...event }]);

/** Refuses a name that another network of the vessel has. */
async function refuseSameName(
  { services, tx, vesselId }: Change,
  ssid: string,
  except: string | null,
): Promise<void> {
  const same = await services.db.row(
    tx,
    'SELECT 1 FROM networks WHERE vessel_id = $vessel AND ssid = $ssid AND removed_at IS NULL AND id IS DISTINCT FROM $except::uuid',
    { vessel: vesselId, ssid, except },
  );
  if (same)
    throw invalid({
      ssid: [
        'Another network of this vessel has this name. Give each its own, so that phones cannot confuse them',
      ],
    });
}

/** Adds a network with the rules its audience starts with; it has no passphrase until one is typed in or made. */
export async function addNetwork(change: Change, body: NetworkBody): Promise<string> {
  const { services, tx, vesselId, now } = change;
  await lockLog(services, tx, vesselId);
  await refuseSameName(change, body.ssid, null);
  const counted = await services.db.row<{ count: number }>(
    tx,
    'SELECT count(*)::int AS count FROM networks WHERE vessel_id = $vessel AND removed_at IS NULL',
    { vessel: vesselId },
  );
  if ((counted?.count ?? 0) >= NETWORKS_MAX)
    throw invalid({ ssid: [`A vessel has at most ${NETWORKS_MAX} networks here`] });
  const id = randomUUID();
  await services.db.run(
    tx,
    `INSERT INTO networks(id, vessel_id, ssid, audience, security, hidden, carries_equipment, note, created_at, updated_at)
     VALUES ($id, $vessel, $ssid, $audience, $security, $hidden, $carriesEquipment, $note, $now, $now)`,
    { ...body, id, vessel: vesselId, now },
  );
  await writePolicy(change, id, STARTING[body.audience]);
  await log(change, {
    kind: 'network.added',
    networkId: id,
    body: { ssid: body.ssid, audience: body.audience, security: body.security },
  });
  return id;
}

async function writePolicy(
  { services, tx, vesselId, now }: Change,
  networkId: string,
  policy: Policy,
): Promise<void> {
  await services.db.run(
    tx,
    `INSERT INTO policies(network_id, vessel_id, age_limit_days, least_bits, words, quiet_hours, on_party_departure, on_sign_off, on_lost_card, on_leak, updated_at)
     VALUES ($network, $vessel, $ageLimitDays, $leastBits, $words, $quietHours, $onPartyDeparture, $onSignOff, $onLostCard, $onLeak, $now)
     ON CONFLICT (network_id) DO UPDATE SET age_limit_days = excluded.age_limit_days, least_bits = excluded.least_bits, words = excluded.words,
       quiet_hours = excluded.quiet_hours, on_party_departure = excluded.on_party_departure, on_sign_off = excluded.on_sign_off,
       on_lost_card = excluded.on_lost_card, on_leak = excluded.on_leak, updated_at = excluded.updated_at`,
    { ...policy, quietHours: JSON.stringify(policy.quietHours), network: networkId, vessel: vesselId, now },
  );
}

/** Refuses what would change a network under a change that has left for the boat. */
async function refuseUnderWay(
  { services, tx, vesselId }: Change,
  networkId: string,
  what: string,
): Promise<void> {
  const open = await services.db.row(
    tx,
    `SELECT 1 FROM rotations WHERE network_id = $network AND vessel_id = $vessel AND state IN ('handed_out','applying','unknown','needs_somebody','reconciling')`,
    { network: networkId, vessel: vesselId },
  );
  if (open)
    throw new AppError(
      'not_now',
      `A change of this network's passphrase is under way. Finish or give it up before you ${what}.`,
    );
}

const JOIN_AGAIN =
  'Every device has to join again: the name is part of what a passphrase is turned into, so the same passphrase under a new name is a new key. Give the access points the new name now.';

/**
 * Corrects a network. Its name, audience and kind of security wait while a change is under way. Answers what has
 * to be done aboard because of it. A new name makes every device join again, since the key is derived from the
 * passphrase and the SSID (IEEE 802.11i-2004 H.4), and a card with the old name or without the mark of a hidden
 * network no longer joins, so such cards are void.
 */
export async function changeNetwork(
  change: Change,
  networkId: string,
  body: NetworkBody,
): Promise<string | null> {
  const { services, tx, vesselId, now } = change;
  await lockNetwork(services, tx, vesselId, networkId);
  const before = await services.db.row<{
    ssid: string;
    audience: Audience;
    security: string;
    hidden: boolean;
  }>(
    tx,
    'SELECT ssid, audience, security, hidden FROM networks WHERE id = $network AND vessel_id = $vessel',
    { network: networkId, vessel: vesselId },
  );
  if (!before) throw notFound();
  await refuseInNote(services, tx, networkId, body.note);
  await refuseSameName(change, body.ssid, networkId);
  const renamed = before.ssid !== body.ssid;
  if (renamed || before.security !== body.security || before.audience !== body.audience)
    await refuseUnderWay(change, networkId, 'change its name, audience or security');
  if (before.audience !== body.audience) await refuseNewAudience(change, networkId);
  await services.db.run(
    tx,
    `UPDATE networks SET ssid = $ssid, audience = $audience, security = $security, hidden = $hidden, carries_equipment = $carriesEquipment,
       note = $note, updated_at = $now WHERE id = $network AND vessel_id = $vessel`,
    { ...body, network: networkId, vessel: vesselId, now },
  );
  await log(change, {
    kind: 'network.changed',
    networkId,
    body: { ssid: body.ssid, security: body.security, carriesEquipment: body.carriesEquipment },
  });
  const cards = renamed || (body.hidden && !before.hidden) ? await voidAllCards(change, networkId) : 0;
  await replanNetwork(services, tx, networkId, now);
  const notice = [
    ...(renamed ? [JOIN_AGAIN] : []),
    ...(cards > 0
      ? [
          `${cards === 1 ? 'One card is' : `${cards} cards are`} void; print new ones before you hand out more.`,
        ]
      : []),
  ];
  return notice.length > 0 ? notice.join(' ') : null;
}

/** A passphrase was made for one audience; letting the network change sides would show it to another. */
async function refuseNewAudience({ services, tx, vesselId }: Change, networkId: string): Promise<void> {
  const kept = await services.db.row(
    tx,
    'SELECT 1 FROM passphrases WHERE network_id = $network AND vessel_id = $vessel AND retired_at IS NULL LIMIT 1',
    { network: networkId, vessel: vesselId },
  );
  if (kept)
    throw invalid({
      audience: [
        'Its passphrase was made for the audience it has now. Add another network for the new audience instead',
      ],
    });
}

async function voidAllCards(change: Change, networkId: string): Promise<number> {
  const { services, tx, vesselId, actor, now } = change;
  const kept = await services.db.rows<{ id: string }>(
    tx,
    'SELECT id FROM passphrases WHERE network_id = $network AND vessel_id = $vessel AND retired_at IS NULL',
    { network: networkId, vessel: vesselId },
  );
  const cards = await voidCards(
    services,
    tx,
    kept.map(({ id }) => id),
    now,
  );
  await appendLog(
    services,
    tx,
    cards.map((card) => ({
      vesselId,
      kind: 'card.void' as const,
      at: now,
      networkId,
      passphraseId: card.passphraseId,
      subject: { kind: 'card' as const, id: card.id },
      actor: { id: actor.personId, name: actor.name },
      body: { serial: card.serial },
    })),
  );
  return cards.length;
}

/** Sets the network's rules and looks at its plan again. */
export async function changePolicy(change: Change, networkId: string, policy: Policy): Promise<void> {
  await lockNetwork(change.services, change.tx, change.vesselId, networkId);
  await writePolicy(change, networkId, policy);
  await log(change, {
    kind: 'policy.changed',
    networkId,
    body: {
      ageLimitDays: policy.ageLimitDays,
      leastBits: policy.leastBits,
      words: policy.words,
      quietHours: JSON.stringify(policy.quietHours),
    },
  });
  await replanNetwork(change.services, change.tx, networkId, change.now);
}
