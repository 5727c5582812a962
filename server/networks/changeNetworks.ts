import { randomUUID } from 'node:crypto';
import type { NetworkBody, Policy } from '../../shared/api/networks.ts';
import { GENERATED_BITS_MIN, NETWORKS_MAX } from '../../shared/rules/limits.ts';
import type { Audience } from '../../shared/rules/permissions.ts';
import type { Tx } from '../db/connection.ts';
import { AppError, invalid, notFound } from '../errors.ts';
import { appendLog, type LogEvent } from '../handovers/appendLog.ts';
import { replanNetwork } from '../rotations/replan.ts';
import type { Services } from '../services.ts';

export interface Change {
  readonly services: Services;
  readonly tx: Tx;
  readonly vesselId: string;
  readonly actor: { readonly personId: string; readonly name: string };
  readonly now: Date;
}

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

const log = (
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

/** Corrects a network. Its name and its kind of security wait while a change is under way. */
export async function changeNetwork(change: Change, networkId: string, body: NetworkBody): Promise<void> {
  const { services, tx, vesselId, now } = change;
  const before = await services.db.row<{ ssid: string; audience: Audience; security: string }>(
    tx,
    'SELECT ssid, audience, security FROM networks WHERE id = $network AND vessel_id = $vessel AND removed_at IS NULL FOR UPDATE',
    { network: networkId, vessel: vesselId },
  );
  if (!before) throw notFound();
  await refuseSameName(change, body.ssid, networkId);
  const identity =
    before.ssid !== body.ssid || before.security !== body.security || before.audience !== body.audience;
  if (identity) await refuseUnderWay(change, networkId, 'change its name, audience or security');
  if (before.audience !== body.audience) {
    const live = await services.db.row(
      tx,
      'SELECT 1 FROM passphrases WHERE network_id = $network AND live_at IS NOT NULL AND retired_at IS NULL',
      { network: networkId },
    );
    if (live)
      throw invalid({
        audience: [
          'People of the audience it has now hold its passphrase. Add another network for the new audience instead',
        ],
      });
  }
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
  await replanNetwork(services, tx, networkId, now);
}

/** Takes a network away. Its planned change is cancelled; its passphrase, cards and log stay as history. */
export async function removeNetwork(change: Change, networkId: string): Promise<void> {
  const { services, tx, vesselId, now } = change;
  await refuseUnderWay(change, networkId, 'remove it');
  const bind = { network: networkId, vessel: vesselId, now };
  const removed = await services.db.run(
    tx,
    'UPDATE networks SET removed_at = $now, updated_at = $now WHERE id = $network AND vessel_id = $vessel AND removed_at IS NULL RETURNING 1',
    bind,
  );
  if (removed.length === 0) throw notFound();
  await services.db.run(
    tx,
    `UPDATE rotations SET state = 'cancelled', ended_at = $now, updated_at = $now WHERE network_id = $network AND vessel_id = $vessel AND state IN ('planned','staged')`,
    bind,
  );
  await log(change, { kind: 'network.removed', networkId });
}

/** Sets the network's rules and looks at its plan again. */
export async function changePolicy(change: Change, networkId: string, policy: Policy): Promise<void> {
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

/** Writes down that the passphrase in force leaked: the network is exposed, and its change moves up. */
export async function reportLeak(change: Change, networkId: string, note: string | undefined): Promise<void> {
  const { services, tx, vesselId, actor, now } = change;
  const live = await services.db.row<{ id: string }>(
    tx,
    'SELECT id FROM passphrases WHERE network_id = $network AND vessel_id = $vessel AND live_at IS NOT NULL AND retired_at IS NULL',
    { network: networkId, vessel: vesselId },
  );
  if (!live)
    throw new AppError(
      'not_now',
      'No passphrase in force is on record for this network, so there is nothing that could leak.',
    );
  await services.db.run(
    tx,
    `INSERT INTO leaks(id, vessel_id, network_id, passphrase_id, kind, note, at, by_person) VALUES ($id, $vessel, $network, $passphrase, 'reported', $note, $now, $by)`,
    {
      id: randomUUID(),
      vessel: vesselId,
      network: networkId,
      passphrase: live.id,
      note: note ?? null,
      now,
      by: actor.personId,
    },
  );
  await log(change, { kind: 'leak.reported', networkId, passphraseId: live.id });
  await replanNetwork(services, tx, networkId, now);
}

/** Takes back a report that was a mistake. A lost card is taken back where the card was marked. */
export async function withdrawLeak(change: Change, networkId: string, leakId: string): Promise<void> {
  const { services, tx, vesselId, now } = change;
  const [withdrawn] = await services.db.run<{ passphrase_id: string }>(
    tx,
    `UPDATE leaks SET withdrawn_at = $now WHERE id = $id AND network_id = $network AND vessel_id = $vessel AND kind = 'reported' AND withdrawn_at IS NULL RETURNING passphrase_id`,
    { id: leakId, network: networkId, vessel: vesselId, now },
  );
  if (!withdrawn) throw notFound();
  await log(change, { kind: 'leak.withdrawn', networkId, passphraseId: withdrawn.passphrase_id });
  await replanNetwork(services, tx, networkId, now);
}
