import type { Security } from '../../shared/api/common.ts';
import type { PassphraseVerdict } from '../../shared/api/passphrases.ts';
import { passphraseCautions } from '../../shared/rules/passphrase.ts';
import { type Verdict, verdict } from '../../shared/rules/strength.ts';
import { AppError, invalid, notFound } from '../errors.ts';
import { appendLog } from '../handovers/appendLog.ts';
import { recordHandover } from '../handovers/recordHandover.ts';
import { lockNetwork } from '../rotations/lockRotation.ts';
import { comeIntoForceByHand } from '../rotations/typedIn.ts';
import type { Services } from '../services.ts';
import { type Asked, holderOf } from './reveal.ts';
import { contextWords, ScoreUnavailable, scoreTyped } from './score.ts';
import { sealPassphrase } from './sealPassphrase.ts';

export interface Judged {
  readonly bits: number;
  readonly verdict: Verdict;
  readonly cautions: readonly string[];
}

/** What is said of a typed passphrase; never its bits or length. */
export const presentVerdict = ({ verdict, cautions }: Judged): PassphraseVerdict => ({
  grade: verdict.grade,
  words: verdict.words,
  why: verdict.why,
  cautions: [...cautions],
});

interface Words {
  ssid: string;
  security: Security;
  age_limit_days: number;
  name: string;
  owner_name: string | null;
  home_port: string | null;
  lying: string | null;
  crew: string[];
  members: string[];
}

/** Scores a typed passphrase with the vessel's own words as what a stranger tries first. Runs before the transaction. */
export async function judge(
  services: Services,
  vesselId: string,
  networkId: string,
  passphrase: string,
): Promise<Judged> {
  const row = await services.db.transaction({ kind: 'vessel', vesselId }, (tx) =>
    services.db.row<Words>(
      tx,
      `SELECT n.ssid, n.security, p.age_limit_days, v.name, v.owner_name, v.home_port, v.lying,
         ARRAY(SELECT c.name FROM crew_members c WHERE c.vessel_id = v.id AND c.signed_off_at IS NULL ORDER BY c.name LIMIT 30) AS crew,
         ARRAY(SELECT DISTINCT p.name FROM memberships m JOIN people p ON p.id = m.person_id
           WHERE m.vessel_id = v.id AND m.ended_at IS NULL ORDER BY p.name LIMIT 30) AS members
       FROM networks n JOIN vessels v ON v.id = n.vessel_id JOIN policies p ON p.network_id = n.id
       WHERE n.id = $network AND n.vessel_id = $vessel AND n.removed_at IS NULL`,
      { network: networkId, vessel: vesselId },
    ),
  );
  if (!row) throw notFound();
  const words = contextWords([
    row.name,
    row.ssid,
    row.owner_name,
    row.home_port,
    row.lying,
    'guest',
    'crew',
    'owner',
    ...row.members,
    ...row.crew,
  ]);
  try {
    const { guesses, bits } = await scoreTyped(passphrase, words);
    return {
      bits,
      verdict: verdict({ security: row.security, ageLimitDays: row.age_limit_days, guesses }),
      cautions: passphraseCautions(passphrase),
    };
  } catch (error) {
    if (error instanceof ScoreUnavailable)
      throw new AppError('unavailable', error.message, { retryAfter: 5, cause: error });
    throw error;
  }
}

/**
 * Writes down the passphrase that is in force already. A weak one is taken, because it is the truth, and flagged.
 * Whoever typed it in holds it. Its age counts from `since` where that is known, else from now.
 */
export async function typeIn(
  asked: Asked,
  given: { readonly passphrase: string; readonly since: Date | null },
  judged: Judged,
): Promise<void> {
  const { services, tx, actor, vesselId, networkId, now } = asked;
  const { passphrase, since } = given;
  if (since && since.getTime() > now.getTime()) {
    throw invalid({
      since: ['That is still to come. Give the day since which it is in force, or leave it empty'],
    });
  }
  await lockNetwork(services, tx, vesselId, networkId);
  await refuseSame(asked, passphrase);
  const passphraseId = await sealPassphrase(services, tx, {
    vesselId,
    networkId,
    passphrase,
    origin: 'typed',
    bits: judged.bits,
    now,
  });
  const by = { now, actor: { id: actor.personId, name: actor.name } };
  await appendLog(services, tx, [
    { vesselId, kind: 'passphrase.typed', at: now, networkId, passphraseId, actor: by.actor },
  ]);
  await comeIntoForceByHand(services, tx, { vesselId, networkId, passphraseId, since: since ?? now }, by);
  const holder = await holderOf(services, tx, vesselId, actor.personId);
  await recordHandover(services, tx, {
    vesselId,
    networkId,
    passphraseId,
    holder,
    channel: 'typed',
    byPerson: actor.personId,
    at: now,
  });
}

/** What is on record already needs no typing in; told apart from reuse, because nobody did anything wrong. */
async function refuseSame({ services, tx, vesselId, networkId }: Asked, passphrase: string): Promise<void> {
  const same = await services.db.row(
    tx,
    `SELECT 1 FROM passphrases x JOIN passphrase_secrets s ON s.passphrase_id = x.id
     WHERE x.network_id = $network AND x.vessel_id = $vessel AND x.live_at IS NOT NULL AND x.retired_at IS NULL
       AND s.fingerprint = $fingerprint`,
    {
      network: networkId,
      vessel: vesselId,
      fingerprint: services.vault.fingerprint(vesselId, passphrase),
    },
  );
  if (same) throw invalid({ passphrase: ['This one is on record as in force already. Nothing was changed'] });
}
