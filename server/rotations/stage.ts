import { POLICY_BITS_MAX, WORDS_MAX, WORDS_MIN } from '../../shared/rules/limits.ts';
import type { Rotation } from '../../shared/rules/rotation.ts';
import { step } from '../../shared/rules/rotationStep.ts';
import type { Tx } from '../db/connection.ts';
import { AppError } from '../errors.ts';
import { faultPoint } from '../faultPoint.ts';
import { appendLog, type LogEvent } from '../handovers/appendLog.ts';
import { bitsOfWords, type Generated, generate, wordsForBits } from '../passphrases/generate.ts';
import { findReused, sealPassphrases } from '../passphrases/sealPassphrase.ts';
import type { Services } from '../services.ts';
import type { By } from './by.ts';

interface StageRow {
  id: string;
  vessel_id: string;
  network_id: string;
  mode: Rotation['mode'];
  driver: Rotation['driver'];
  epoch: number;
  due_at: Date;
  last_ticket: string;
  last_generation: number;
  words: number;
  least_bits: number;
  from_id: string | null;
  access_points: string[];
}

export interface StageOptions {
  /** Makes one passphrase; tests put their own in. */
  readonly make?: (words: number) => Generated;
}

/**
 * Stages planned rotations whose log heads, networks and rotations the caller has locked: makes each a
 * passphrase by its policy, seals it, gives it the network's next ticket and freezes the list of access points.
 * Everything is in the caller's transaction, so either all of it is true or none. A passphrase the vessel had
 * before is drawn again here, before anything is stored; afterwards a ticket keeps its passphrase for ever.
 */
export async function stageAll(
  services: Services,
  tx: Tx,
  rotationIds: readonly string[],
  by: By,
  options: StageOptions = {},
): Promise<void> {
  if (rotationIds.length === 0) return;
  const rows = await services.db.rows<StageRow>(
    tx,
    `SELECT r.id, r.vessel_id, r.network_id, r.mode, v.driver, v.epoch, r.due_at, n.last_ticket, n.last_generation,
       p.words, p.least_bits, x.id AS from_id, coalesce(a.ids, '{}') AS access_points
     FROM rotations r JOIN networks n ON n.id = r.network_id JOIN vessels v ON v.id = r.vessel_id
     JOIN policies p ON p.network_id = r.network_id
     LEFT JOIN passphrases x ON x.network_id = r.network_id AND x.live_at IS NOT NULL AND x.retired_at IS NULL
     LEFT JOIN LATERAL (SELECT array_agg(id ORDER BY position, name, id) AS ids FROM access_points
       WHERE vessel_id = r.vessel_id AND removed_at IS NULL) a ON true
     WHERE r.id = ANY($ids::uuid[]) AND r.state = 'planned'`,
    { ids: rotationIds },
  );
  const made = await makePassphrases(services, tx, rows, options.make ?? ((words) => generate({ words })));
  faultPoint('S2');
  const ids = await sealPassphrases(
    services,
    tx,
    rows.map((row, index) => ({
      vesselId: row.vessel_id,
      networkId: row.network_id,
      passphrase: made[index]?.passphrase ?? '',
      bits: made[index]?.bits ?? 0,
      origin: 'generated',
      generation: row.last_generation + 1,
      now: by.now,
    })),
  );
  const staged = rows.map((row, index) => stagedRow(row, ids[index] ?? '', by.now));
  await storeStaged(services, tx, staged, by.now);
  await appendLog(
    services,
    tx,
    staged.map(
      (one): LogEvent => ({
        vesselId: one.vessel_id,
        kind: 'rotation.staged',
        at: by.now,
        networkId: one.network_id,
        passphraseId: one.to_id,
        subject: { kind: 'rotation', id: one.id },
        actor: by.actor,
        body: { driver: one.driver, mode: one.mode, epoch: one.epoch, ticket: one.ticket, dueAt: one.due_at },
      }),
    ),
  );
  faultPoint('S3');
}

/** Words that give at least the policy's bits. */
function wordsOf({ words, least_bits }: StageRow): number {
  const wanted = Math.min(Math.max(words, WORDS_MIN), WORDS_MAX);
  return bitsOfWords(wanted) >= least_bits ? wanted : wordsForBits(Math.min(least_bits, POLICY_BITS_MAX));
}

async function makePassphrases(
  services: Services,
  tx: Tx,
  rows: readonly StageRow[],
  make: (words: number) => Generated,
): Promise<Generated[]> {
  const made = rows.map((row) => make(wordsOf(row)));
  for (let round = 0; round < 5; round++) {
    const given = rows.map((row, index) => ({
      vesselId: row.vessel_id,
      passphrase: made[index]?.passphrase ?? '',
    }));
    const again = await findReused(services, tx, given);
    const seen = new Set<string>();
    for (const [index, { vesselId, passphrase }] of given.entries()) {
      const key = `${vesselId} ${passphrase}`;
      if (seen.has(key)) again.add(index);
      seen.add(key);
    }
    if (again.size === 0) return made;
    for (const index of again) {
      const row = rows[index];
      if (row) made[index] = make(wordsOf(row));
    }
  }
  throw new AppError('internal', 'No new passphrase could be made: every one drawn was used before.');
}

function stagedRow(row: StageRow, toId: string, now: Date) {
  const ticket = { epoch: row.epoch, number: Number(row.last_ticket) + 1 };
  const planned: Rotation = {
    state: 'planned',
    mode: row.mode,
    driver: row.driver,
    ticket: null,
    from: row.from_id,
    to: null,
    dueAt: row.due_at,
    takesOver: false,
    handedOutAt: null,
    reportBy: null,
    targets: [],
    ways: [],
    waivedBy: null,
    detail: null,
  };
  const outcome = step(planned, { kind: 'stage', ticket, to: toId, targets: row.access_points }, now);
  if (!outcome.ok) throw new AppError('not_now', outcome.sentence);
  return {
    id: row.id,
    vessel_id: row.vessel_id,
    network_id: row.network_id,
    driver: row.driver,
    mode: row.mode,
    epoch: ticket.epoch,
    ticket: ticket.number,
    to_id: toId,
    due_at: row.due_at.toISOString(),
    access_points: row.access_points,
    state: outcome.next.state,
  };
}

/**
 * Written with lookups by key only: the fences between vessels hide from the planner how many rows there are, so
 * it would join a list of rows with a whole table by trying every pair.
 */
async function storeStaged(
  services: Services,
  tx: Tx,
  staged: readonly ReturnType<typeof stagedRow>[],
  now: Date,
): Promise<void> {
  const { db } = services;
  const ids = staged.map((one) => one.id);
  await db.run(
    tx,
    'UPDATE networks SET last_ticket = last_ticket + 1, last_generation = last_generation + 1 WHERE id = ANY($ids::uuid[])',
    { ids: staged.map((one) => one.network_id) },
  );
  const stored = await db.run<{ id: string; ticket: string; to_passphrase_id: string }>(
    tx,
    `UPDATE rotations r SET state = 'staged', driver = v.driver, epoch = v.epoch, ticket = n.last_ticket, staged_at = $now,
       updated_at = $now,
       from_passphrase_id = (SELECT id FROM passphrases f
         WHERE f.network_id = r.network_id AND f.live_at IS NOT NULL AND f.retired_at IS NULL),
       to_passphrase_id = (SELECT id FROM passphrases t
         WHERE t.network_id = r.network_id AND t.generation = n.last_generation)
     FROM networks n, vessels v WHERE r.id = ANY($ids::uuid[]) AND n.id = r.network_id AND v.id = r.vessel_id
     RETURNING r.id, r.ticket, r.to_passphrase_id`,
    { ids, now },
  );
  const known = new Map(stored.map((row) => [row.id, row]));
  for (const one of staged) {
    const row = known.get(one.id);
    if (row?.to_passphrase_id !== one.to_id || Number(row.ticket) !== one.ticket || one.state !== 'staged') {
      throw new AppError(
        'conflict',
        'This change was altered while it was being prepared. It is tried again.',
      );
    }
  }
  await db.run(
    tx,
    `INSERT INTO rotation_targets(rotation_id, access_point_id, vessel_id)
     SELECT * FROM unnest($rotations::uuid[], $accessPoints::uuid[], $vessels::uuid[])`,
    {
      rotations: staged.flatMap((one) => one.access_points.map(() => one.id)),
      accessPoints: staged.flatMap((one) => one.access_points),
      vessels: staged.flatMap((one) => one.access_points.map(() => one.vessel_id)),
    },
  );
}
