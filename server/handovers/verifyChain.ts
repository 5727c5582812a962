import type { KeyObject } from 'node:crypto';
import type { Database, Tx } from '../db/connection.ts';
import { type ChainedFields, commitment, entryHash, GENESIS } from './appendLog.ts';
import { type Checkpoint, isGenuine } from './checkpoint.ts';

/** What a look at one vessel's log found. */
export interface Verdict {
  readonly vesselId: string;
  /** Entries that hold, from the first one on. */
  readonly entries: number;
  /** Signed heads compared. */
  readonly checkpoints: number;
  /** The first number at which the log is not what was written, and why. */
  readonly bad: { readonly seq: number; readonly why: string } | null;
}

interface Row {
  id: string;
  vessel_id: string;
  seq: string;
  at: string;
  kind: string;
  network_id: string | null;
  passphrase_id: string | null;
  subject_kind: string | null;
  subject_id: string | null;
  actor_id: string | null;
  body: Record<string, unknown>;
  prev_hash: Buffer;
  hash: Buffer;
  names: { role: string; salt: string; name: string }[];
}

const PAGE = 2000;

/**
 * Reads one vessel's log from its start: every hash is made again, numbers run without a gap, names that are
 * still kept match what the entry says about them, and the end is the head the database and every signed
 * checkpoint know. Checkpoints are those of the database and `outside`, from files it cannot reach.
 */
export async function verifyChain(
  db: Database,
  tx: Tx,
  vesselId: string,
  signed: { readonly key: KeyObject; readonly outside: readonly Checkpoint[] },
): Promise<Verdict> {
  const outside = signed.outside.filter((one) => one.vesselId === vesselId);
  const checkpoints = [...(await storedCheckpoints(db, tx, vesselId)), ...outside];
  const genuine = checkpoints.filter((one) => isGenuine(signed.key, one));
  // All of them count: a log written anew and signed again by its server still meets the head signed before.
  const expected = new Map<number, string[]>();
  for (const { seq: signedSeq, hash: signedHash } of genuine)
    expected.set(signedSeq, [...(expected.get(signedSeq) ?? []), signedHash]);
  let seq = 0;
  let hash: Buffer = GENESIS;
  const stop = (at: number, why: string): Verdict => ({
    vesselId,
    entries: seq,
    checkpoints: genuine.length,
    bad: { seq: at, why },
  });
  for (;;) {
    const rows = await page(db, tx, vesselId, seq);
    for (const row of rows) {
      const why = faultOf(row, vesselId, seq, hash) ?? forged(expected, seq + 1, row.hash);
      if (why !== null) return stop(seq + 1, why);
      seq += 1;
      hash = row.hash;
    }
    if (rows.length < PAGE) break;
  }
  const head = await db.row<{ seq: string; hash: Buffer }>(
    tx,
    'SELECT seq, hash FROM log_heads WHERE vessel_id = $vessel',
    { vessel: vesselId },
  );
  if (head && Number(head.seq) > seq) return stop(seq + 1, 'entries are missing at the end');
  if (seq > 0 && (!head || Number(head.seq) !== seq || !head.hash.equals(hash)))
    return stop(seq, 'the head of the log is not its last entry');
  const furthest = Math.max(0, ...expected.keys());
  if (furthest > seq) return stop(seq + 1, 'entries that a signed checkpoint knows are missing at the end');
  if (genuine.length < checkpoints.length) {
    const odd = checkpoints.find((one) => !genuine.includes(one));
    return stop(odd?.seq ?? seq, 'a checkpoint carries a signature that is not ours');
  }
  return { vesselId, entries: seq, checkpoints: genuine.length, bad: null };
}

function faultOf(row: Row, vesselId: string, seq: number, hash: Buffer): string | null {
  if (Number(row.seq) !== seq + 1) return 'an entry is missing or out of its place';
  if (!row.prev_hash.equals(hash)) return 'it does not follow the entry before it';
  const fields: ChainedFields = {
    id: row.id,
    vesselId,
    seq: Number(row.seq),
    at: row.at,
    kind: row.kind,
    networkId: row.network_id,
    passphraseId: row.passphrase_id,
    subjectKind: row.subject_kind,
    subjectId: row.subject_id,
    actorId: row.actor_id,
    body: row.body,
  };
  if (!entryHash(hash, fields).equals(row.hash)) return 'its content is not what was written';
  for (const { role, salt, name } of row.names) {
    if (row.body[`${role}Commitment`] !== commitment(Buffer.from(salt, 'hex'), name))
      return 'a name kept with it is not the one that was written';
  }
  return null;
}

const forged = (expected: ReadonlyMap<number, string[]>, seq: number, hash: Buffer): string | null =>
  expected.get(seq)?.some((known) => known !== hash.toString('hex'))
    ? 'a signed checkpoint knows another entry here'
    : null;

// Instants are written in milliseconds; more digits than that were not written by us and change the hash.
const AT = `to_char(e.at AT TIME ZONE 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS.US')`;

function page(db: Database, tx: Tx, vesselId: string, after: number): Promise<Row[]> {
  return db.rows<Row>(
    tx,
    `SELECT e.id, e.vessel_id, e.seq, regexp_replace(${AT}, '000$', '') || 'Z' AS at, e.kind, e.network_id, e.passphrase_id,
       e.subject_kind, e.subject_id, e.actor_id, e.body, e.prev_hash, e.hash,
       (SELECT coalesce(json_agg(json_build_object('role', n.role, 'salt', encode(n.salt, 'hex'), 'name', n.name)), '[]')
          FROM log_names n WHERE n.entry_id = e.id) AS names
     FROM log_entries e WHERE e.vessel_id = $vessel AND e.seq > $after ORDER BY e.seq LIMIT ${PAGE}`,
    { vessel: vesselId, after },
  );
}

async function storedCheckpoints(db: Database, tx: Tx, vesselId: string): Promise<Checkpoint[]> {
  const rows = await db.rows<{ seq: string; hash: Buffer; signature: Buffer; at: Date }>(
    tx,
    'SELECT seq, hash, signature, at FROM log_checkpoints WHERE vessel_id = $vessel ORDER BY seq',
    { vessel: vesselId },
  );
  return rows.map((row) => ({
    vesselId,
    seq: Number(row.seq),
    hash: row.hash.toString('hex'),
    at: row.at.toISOString(),
    signature: row.signature.toString('base64'),
  }));
}
