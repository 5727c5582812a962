import type { KeyObject } from 'node:crypto';
import { readdir, readFile } from 'node:fs/promises';
import { join } from 'node:path';
import { z } from 'zod';
import { Misconfigured, readConfig } from '../config.ts';
import { Database } from '../db/connection.ts';
import { type Checkpoint, checkpointKey, isGenuine } from '../handovers/checkpoint.ts';
import { verifyChain } from '../handovers/verifyChain.ts';

const line = z.object({
  vesselId: z.string(),
  seq: z.number().int(),
  hash: z.string(),
  at: z.string(),
  signature: z.string(),
});

/** Every checkpoint kept outside the database. Throws when a line cannot be read. */
async function outside(folder: string | null): Promise<Checkpoint[]> {
  if (folder === null) return [];
  const files = await readdir(folder).catch((): string[] => []);
  const texts = await Promise.all(
    files.filter((name) => name.endsWith('.jsonl')).map((name) => readFile(join(folder, name), 'utf8')),
  );
  return texts
    .flatMap((text) => text.split('\n'))
    .filter((text) => text !== '')
    .map((text) => line.parse(JSON.parse(text)));
}

/** Vessels whose log was signed for outside the database and that the database knows nothing of, with its length then. */
function lostLogs(
  { key, outside }: { key: KeyObject; outside: readonly Checkpoint[] },
  known: ReadonlySet<string>,
  only: string | undefined,
): Map<string, number> {
  const lost = new Map<string, number>();
  for (const checkpoint of outside) {
    const { vesselId, seq } = checkpoint;
    if (known.has(vesselId) || (only !== undefined && only !== vesselId) || !isGenuine(key, checkpoint))
      continue;
    lost.set(vesselId, Math.max(seq, lost.get(vesselId) ?? 0));
  }
  return lost;
}

/** Checks the log of one vessel (its identifier as argument) or of all; ends with 1 where one does not hold. */
async function verifyLog(only: string | undefined): Promise<void> {
  const config = readConfig(process.env);
  const db = new Database(config.databaseUrl, { poolMax: 1 });
  const signed = { key: checkpointKey(config.logSigningSeed), outside: await outside(config.checkpointDir) };
  let [entries, bad] = [0, 0];
  try {
    await db.transaction({ kind: 'system' }, async (tx) => {
      const vessels = await db.rows<{ id: string; name: string }>(
        tx,
        'SELECT id, name FROM vessels WHERE $only::uuid IS NULL OR id = $only::uuid ORDER BY name, id',
        { only: only ?? null },
      );
      for (const { id, name } of vessels) {
        const verdict = await verifyChain(db, tx, id, signed);
        entries += verdict.entries;
        if (!verdict.bad) continue;
        bad += 1;
        process.stdout.write(`${name} (${id}): entry ${verdict.bad.seq}: ${verdict.bad.why}\n`);
      }
      for (const [id, entries] of lostLogs(signed, new Set(vessels.map((one) => one.id)), only)) {
        bad += 1;
        process.stdout.write(`${id}: the whole log is gone; ${entries} entries of it had been signed for\n`);
      }
      process.stdout.write(
        bad === 0
          ? `${entries} entries of ${vessels.length} logs hold, compared with ${signed.outside.length} checkpoints outside the database.\n`
          : `${bad === 1 ? '1 log is' : `${bad} logs are`} not what was written; ${vessels.length} were read.\n`,
      );
    });
  } finally {
    await db.close();
  }
  if (bad > 0) process.exitCode = 1;
}

try {
  await verifyLog(process.argv[2]);
} catch (error) {
  const known = error instanceof Misconfigured || error instanceof z.ZodError;
  process.stderr.write(
    `${known ? error.message : `The log could not be read: ${error instanceof Error ? error.message : 'unknown'}`}\n`,
  );
  process.exitCode = 2;
}
