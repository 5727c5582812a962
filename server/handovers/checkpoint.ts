import { createPrivateKey, createPublicKey, type KeyObject, randomUUID, sign, verify } from 'node:crypto';
import { type FileHandle, mkdir, open } from 'node:fs/promises';
import { join } from 'node:path';
import canonicalize from 'canonicalize';
import type { LogKind } from '../../shared/rules/logKinds.ts';
import type { Services } from '../services.ts';

/** A vessel's signed log head: what its last entry was at an instant. */
export interface Checkpoint {
  readonly vesselId: string;
  readonly seq: number;
  /** Hexadecimal. */
  readonly hash: string;
  /** ISO 8601, UTC. */
  readonly at: string;
  /** Ed25519 over the four fields above as canonical JSON (RFC 8785, RFC 8032), in base64. */
  readonly signature: string;
}

// RFC 8410 section 7: what stands before a 32-octet Ed25519 seed in PKCS #8.
const PKCS8_ED25519 = Buffer.from('302e020100300506032b657004220420', 'hex');

/** More octets than a checkpoint's line has; one is about 280. */
const LINE_MAX = 1024;

const privateKey = (seed: Buffer): KeyObject =>
  createPrivateKey({ key: Buffer.concat([PKCS8_ED25519, seed]), format: 'der', type: 'pkcs8' });

/** The key with which anybody can check a checkpoint. */
export const checkpointKey = (seed: Buffer): KeyObject => createPublicKey(privateKey(seed));

const signedText = ({ vesselId, seq, hash, at }: Omit<Checkpoint, 'signature'>): Buffer =>
  Buffer.from(canonicalize({ vesselId, seq, hash, at }) ?? '');

export function signCheckpoint(seed: Buffer, head: Omit<Checkpoint, 'signature'>): Checkpoint {
  return { ...head, signature: sign(null, signedText(head), privateKey(seed)).toString('base64') };
}

/** True when the holder of the seed signed exactly this. */
export function isGenuine(key: KeyObject, checkpoint: Checkpoint): boolean {
  const signature = Buffer.from(checkpoint.signature, 'base64');
  return signature.length === 64 && verify(null, signedText(checkpoint), key, signature);
}

/** What tells that somebody got a passphrase or the log itself. */
const DISCLOSING: readonly LogKind[] = [
  'passphrase.revealed',
  'handover.card',
  'handover.screen',
  'handover.own_page',
  'card.printed',
  'rotation.sheet_opened',
  'log.exported',
];

/**
 * Signs the head of every log that grew since its last checkpoint, or of those in which something was disclosed
 * since then, into the database and, where a folder is set, into a file outside it, which an owner of the database
 * cannot rewrite. Answers how many were signed; where the file cannot be written it throws and none is.
 */
export async function checkpointLogs(
  services: Services,
  which: 'grown' | 'disclosing' = 'grown',
): Promise<number> {
  const { db, config } = services;
  const at = services.clock.now();
  return db.transaction({ kind: 'system' }, async (tx) => {
    const alone = await db.row<{ mine: boolean }>(
      tx,
      "SELECT pg_try_advisory_xact_lock(hashtext('log checkpoint')) AS mine",
    );
    if (!alone?.mine) return 0;
    const heads = await db.rows<{ vessel_id: string; seq: string; hash: Buffer }>(
      tx,
      `SELECT h.vessel_id, h.seq, h.hash FROM log_heads h,
         LATERAL (SELECT coalesce(max(c.seq), 0) AS seq FROM log_checkpoints c WHERE c.vessel_id = h.vessel_id) signed
       WHERE h.seq > signed.seq AND ($kinds::text[] IS NULL OR EXISTS (
         SELECT 1 FROM log_entries e WHERE e.vessel_id = h.vessel_id AND e.seq > signed.seq AND e.kind = ANY($kinds::text[])))
       ORDER BY h.vessel_id`,
      { kinds: which === 'grown' ? null : DISCLOSING },
    );
    const signed = heads.map((head) =>
      signCheckpoint(config.logSigningSeed, {
        vesselId: head.vessel_id,
        seq: Number(head.seq),
        hash: head.hash.toString('hex'),
        at: at.toISOString(),
      }),
    );
    if (signed.length === 0) return 0;
    if (config.checkpointDir) await keepOutside(config.checkpointDir, signed);
    await db.run(
      tx,
      `INSERT INTO log_checkpoints(id, vessel_id, seq, hash, signature, at)
       SELECT id, "vesselId", seq, decode(hash, 'hex'), decode(signature, 'base64'), at
       FROM jsonb_to_recordset($rows::jsonb) AS c(id uuid, "vesselId" uuid, seq bigint, hash text, signature text, at timestamptz)`,
      { rows: JSON.stringify(signed.map((one) => ({ ...one, id: randomUUID() }))) },
    );
    return signed.length;
  });
}

/** One line a checkpoint, appended and on the disk before this returns; a line is there whole or not at all. */
async function keepOutside(folder: string, signed: readonly Checkpoint[]): Promise<void> {
  await mkdir(folder, { recursive: true });
  for (const one of signed) {
    const file = await open(join(folder, checkpointFile(one.vesselId)), 'a+', 0o600);
    try {
      const whole = await endOfLastLine(file);
      try {
        await file.appendFile(`${JSON.stringify(one)}\n`);
        await file.sync();
      } catch (error) {
        await file.truncate(whole).catch(() => undefined);
        throw error;
      }
    } finally {
      await file.close();
    }
  }
}

/** Where the last whole line ends. What a power cut left behind it was never taken for written, and is cut off. */
async function endOfLastLine(file: FileHandle): Promise<number> {
  const { size } = await file.stat();
  const from = Math.max(0, size - LINE_MAX);
  const { buffer, bytesRead } = await file.read(Buffer.alloc(size - from), 0, size - from, from);
  const whole = from + buffer.subarray(0, bytesRead).lastIndexOf(0x0a) + 1;
  if (whole < size) await file.truncate(whole);
  return whole;
}

/** Name of a vessel's file in the checkpoint folder. */
export const checkpointFile = (vesselId: string): string => `${vesselId}.jsonl`;
