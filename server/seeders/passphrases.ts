import { randomInt, randomUUID } from 'node:crypto';
import type { Security } from '../../shared/api/common.ts';
import { checkPassphrase } from '../../shared/rules/passphrase.ts';
import { roughGuess } from '../../shared/rules/strength.ts';
import { generate } from '../passphrases/generate.ts';
import { contextWords, scoreTyped } from '../passphrases/score.ts';
import { sealPassphrase } from '../passphrases/sealPassphrase.ts';
import { WORDS } from '../passphrases/wordList.ts';
import { minutes } from './calendar.ts';
import type { Laying, NetworkPlan } from './laying.ts';

const DAY_MINUTES = 1440;
/** What people make up that is guessed in about so long: words run together and digits (measured by the scorer). */
const SHAPES = {
  hours: { words: 2, digits: 3 },
  months: { words: 3, digits: 2 },
  years: { words: 3, digits: 4 },
} as const;
/** Between four and eight of ten draws fit. */
const TRIES = 60;

/**
 * A passphrase as people make them up, that the scorer says takes about `wanted` to guess with the vessel's own
 * words known. Drawn anew from `crypto` each time.
 * @throws Error when none of many draws fits, which does not happen by chance.
 */
export async function madeUp(
  wanted: keyof typeof SHAPES,
  security: Security,
  vesselWords: readonly string[],
): Promise<{ passphrase: string; bits: number }> {
  const context = contextWords(vesselWords);
  const shape = SHAPES[wanted];
  for (let attempt = 0; attempt < TRIES; attempt++) {
    const words = Array.from({ length: shape.words }, () => WORDS[randomInt(WORDS.length)] ?? '');
    const passphrase = words.join('') + randomInt(10 ** (shape.digits - 1), 10 ** shape.digits);
    if (!checkPassphrase(passphrase).ok) continue;
    const bits = rounded((await scoreTyped(passphrase, context)).bits);
    if (roughGuess(security, bits).startsWith(wanted)) return { passphrase, bits };
  }
  throw new Error(`No made-up passphrase takes ${wanted} to guess`);
}

/** As the column keeps bits: two decimals. */
export const rounded = (bits: number): number => Math.round(bits * 100) / 100;

export interface SealedGenerations {
  readonly live: string;
  /** The one before it, already retired and no longer kept; null where there was none. */
  readonly before: string | null;
  readonly beforeLiveAt: Date;
}

/** The passphrase in force, and for a network Quayword has changed before the one that was in force until then. */
export async function sealGenerations(
  { services, tx, dice }: Laying,
  vesselId: string,
  networkId: string,
  network: NetworkPlan,
): Promise<SealedGenerations> {
  const { db } = services;
  const beforeLiveAt = minutes(
    network.liveAt,
    -Math.round(network.limitDays * (0.4 + dice.next() * 0.5) * DAY_MINUTES),
  );
  let before: string | null = null;
  if (!network.typed) {
    const made = generate();
    before = await sealPassphrase(services, tx, {
      vesselId,
      networkId,
      passphrase: made.passphrase,
      origin: 'generated',
      bits: rounded(made.bits),
      now: beforeLiveAt,
    });
    // Retired ones are forgotten once nothing aboard can be running them any more.
    const purgedAt = minutes(network.liveAt, 7 * DAY_MINUTES);
    const gone = purgedAt.getTime() < services.clock.now().getTime();
    await db.run(
      tx,
      'UPDATE passphrases SET live_at = $liveAt, retired_at = $retiredAt, purged_at = $purgedAt WHERE id = $id',
      { id: before, liveAt: beforeLiveAt, retiredAt: network.liveAt, purgedAt: gone ? purgedAt : null },
    );
    if (gone) {
      await db.run(tx, 'UPDATE passphrase_secrets SET sealed = NULL WHERE passphrase_id = $id', {
        id: before,
      });
    }
  }
  const made = network.typed
    ? { ...network.typed, origin: 'typed' as const }
    : { ...generate(), origin: 'generated' as const };
  const live = await sealPassphrase(services, tx, {
    vesselId,
    networkId,
    passphrase: made.passphrase,
    origin: made.origin,
    bits: rounded(made.bits),
    now: network.liveAt,
  });
  await db.run(tx, 'UPDATE passphrases SET live_at = $liveAt WHERE id = $id', {
    id: live,
    liveAt: network.liveAt,
  });
  return { live, before, beforeLiveAt };
}

/** How the passphrases came into force: the change in force now and, retired, the one before. */
export function layRotations(
  laying: Laying,
  vessel: { id: string; driver: 'by_hand' | 'rehearsal'; accessPointIds: readonly string[] },
  networkId: string,
  network: NetworkPlan,
  sealed: SealedGenerations,
): void {
  const { rows, log, dice } = laying;
  if (vessel.driver === 'rehearsal') {
    for (const accessPointId of vessel.accessPointIds) {
      rows.add('rehearsal_access_points', {
        access_point_id: accessPointId,
        network_id: networkId,
        vessel_id: vessel.id,
        passphrase_id: sealed.live,
        silent: false,
      });
    }
  }
  if (sealed.before === null) {
    log.push({
      vesselId: vessel.id,
      kind: 'passphrase.typed',
      at: network.liveAt,
      networkId,
      passphraseId: sealed.live,
      body: { audience: network.audience },
    });
    return;
  }
  const change = (
    ticket: number,
    state: 'live' | 'retired',
    from: string | null,
    to: string,
    liveAt: Date,
  ) => {
    const id = randomUUID();
    const late = dice.next() < 0.12;
    const due = minutes(liveAt, -2);
    rows.add('rotations', {
      id,
      vessel_id: vessel.id,
      network_id: networkId,
      state,
      mode: 'graceful',
      driver: vessel.driver,
      epoch: 1,
      ticket,
      from_passphrase_id: from,
      to_passphrase_id: to,
      planned_by: 'plan',
      reasons: [
        { code: 'age_limit', days: network.limitDays, reachedAt: minutes(due, DAY_MINUTES).toISOString() },
      ],
      due_at: due,
      deadline_at: late
        ? minutes(due, -dice.between(30, 3 * DAY_MINUTES))
        : minutes(due, dice.between(60, 4 * DAY_MINUTES)),
      staged_at: minutes(due, -DAY_MINUTES),
      handed_out_at: minutes(due, -30),
      applying_at: due,
      live_at: liveAt,
      ended_at: state === 'retired' ? network.liveAt : null,
      created_at: minutes(due, -3 * DAY_MINUTES),
      updated_at: liveAt,
    });
    for (const accessPointId of vessel.accessPointIds) {
      rows.add('rotation_targets', {
        rotation_id: id,
        access_point_id: accessPointId,
        vessel_id: vessel.id,
        seen: 'new',
        evidence: vessel.driver === 'by_hand' ? 'E2' : 'E1',
        seen_at: liveAt,
      });
    }
    for (const way of vessel.driver === 'by_hand' ? ['officer', 'card'] : ['journal', 'officer']) {
      rows.add('rotation_ways', { rotation_id: id, vessel_id: vessel.id, way, at: minutes(due, -20) });
    }
    log.push({
      vesselId: vessel.id,
      kind: 'rotation.live',
      at: liveAt,
      networkId,
      passphraseId: to,
      subject: { kind: 'rotation', id },
      body: { audience: network.audience, ticket },
    });
  };
  change(1, 'retired', null, sealed.before, sealed.beforeLiveAt);
  change(2, 'live', sealed.before, sealed.live, network.liveAt);
}
