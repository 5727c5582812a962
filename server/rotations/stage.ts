import { randomUUID } from 'node:crypto';
import { POLICY_BITS_MAX, WORDS_MAX, WORDS_MIN } from '../../shared/rules/limits.ts';
import type { Rotation } from '../../shared/rules/rotation.ts';
import { step } from '../../shared/rules/rotationStep.ts';
import type { Tx } from '../db/connection.ts';
import { AppError } from '../errors.ts';
import { faultPoint } from '../faultPoint.ts';
import { appendLog, type LogEvent } from '../handovers/appendLog.ts';
import { bitsOfWords, type Generated, generate, wordsForBits } from '../passphrases/generate.ts';
import { findReused, type NumberedPassphrase, sealPassphrases } from '../passphrases/sealPassphrase.ts';
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
  const staged = made.map(({ row, id }) => stagedRow(row, id, by.now));
  // Sent one behind the other: while the database does one, the next is written down. The first that fails ends all.
  await Promise.all([
    sealPassphrases(services, tx, made.map(numbered(by.now))),
    storeStaged(services, tx, staged, by.now),
    appendLog(services, tx, staged.map(stagedEvent(by))),
  ]);
  faultPoint('S3');
}

const numbered =
  (now: Date) =>
  ({ row, id, vesselId, passphrase, fingerprint, bits }: Made): NumberedPassphrase => ({
    id,
    vesselId,
    networkId: row.network_id,
    passphrase,
    fingerprint,
    bits,
    origin: 'generated',
    generation: row.last_generation + 1,
    now,
  });

const stagedEvent =
  ({ now, actor }: By) =>
  (one: StagedRow): LogEvent => ({
    vesselId: one.vessel_id,
    kind: 'rotation.staged',
    at: now,
    networkId: one.network_id,
    passphraseId: one.to_id,
    subject: { kind: 'rotation', id: one.id },
    actor,
    body: { driver: one.driver, mode: one.mode, epoch: one.epoch, ticket: one.ticket, dueAt: one.due_at },
  });

/** Words that give at least the policy's bits. */
function wordsOf({ words, least_bits }: StageRow): number {
  const wanted = Math.min(Math.max(words, WORDS_MIN), WORDS_MAX);
  return bitsOfWords(wanted) >= least_bits ? wanted : wordsForBits(Math.min(least_bits, POLICY_BITS_MAX));
}

interface Made extends Generated {
  readonly id: string;
  readonly row: StageRow;
  readonly vesselId: string;
  readonly fingerprint: Buffer;
}

async function makePassphrases(
  services: Services,
  tx: Tx,
  rows: readonly StageRow[],
  make: (words: number) => Generated,
): Promise<Made[]> {
  const draw = (row: StageRow): Made => {
    const drawn = make(wordsOf(row));
    const fingerprint = services.vault.fingerprint(row.vessel_id, drawn.passphrase);
    return { ...drawn, id: randomUUID(), row, vesselId: row.vessel_id, fingerprint };
  };
  let made = rows.map(draw);
  for (let round = 0; round < 5; round++) {
    const again = await findReused(services, tx, made);
    // The fingerprint covers the vessel too: two of the same are one passphrase aboard one vessel.
    const seen = new Set<string>();
    for (const [index, { fingerprint }] of made.entries()) {
      const key = fingerprint.toString('base64');
      if (seen.has(key)) again.add(index);
      seen.add(key);
    }
    if (again.size === 0) return made;
    made = made.map((one, index) => (again.has(index) ? draw(one.row) : one));
  }
  throw new AppError('internal', 'No new passphrase could be made: every one drawn was used before.');
}

type StagedRow = ReturnType<typeof stagedRow>;

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
    generation: row.last_generation + 1,
    from_id: row.from_id,
    to_id: toId,
    due_at: row.due_at.toISOString(),
    access_points: row.access_points,
    state: outcome.next.state,
  };
}

/** Everything was read under the locks on networks and rotations; what was altered since all the same is refused. */
async function storeStaged(
  services: Services,
  tx: Tx,
  staged: readonly StagedRow[],
  now: Date,
): Promise<void> {
  const { db } = services;
  const done = await db.row<{ counted: number; stored: number }>(
    tx,
    `WITH s AS (
       SELECT * FROM jsonb_to_recordset($rows::jsonb) AS s(id uuid, vessel_id uuid, network_id uuid, state text, driver text,
         epoch integer, ticket bigint, generation integer, from_id uuid, to_id uuid, access_points uuid[])),
     counted AS (
       UPDATE networks n SET last_ticket = s.ticket, last_generation = s.generation FROM s
       WHERE n.id = s.network_id AND n.last_ticket = s.ticket - 1 AND n.last_generation = s.generation - 1
       RETURNING n.id),
     stored AS (
       UPDATE rotations r SET state = s.state, driver = s.driver, epoch = s.epoch, ticket = s.ticket,
         from_passphrase_id = s.from_id, to_passphrase_id = s.to_id, staged_at = $now, updated_at = $now FROM s
       WHERE r.id = s.id AND r.state = 'planned' RETURNING r.id),
     frozen AS (
       INSERT INTO rotation_targets(rotation_id, access_point_id, vessel_id)
       SELECT s.id, a.id, s.vessel_id FROM s, unnest(s.access_points) AS a(id))
     SELECT (SELECT count(*) FROM counted)::integer AS counted, (SELECT count(*) FROM stored)::integer AS stored`,
    { rows: JSON.stringify(staged), now },
  );
  if (done?.counted !== staged.length || done.stored !== staged.length) {
    throw new AppError('conflict', 'This change was altered while it was being prepared. It is tried again.');
  }
}
