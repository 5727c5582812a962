import { execFile } from 'node:child_process';
import { randomBytes } from 'node:crypto';
import { mkdtemp, rm } from 'node:fs/promises';
import os from 'node:os';
import path from 'node:path';
import { promisify } from 'node:util';
import pg from 'pg';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { Database } from '../../../server/db/connection.ts';
import { checkKeys } from '../../../server/db/keyCheck.ts';
import { Vault, VaultError } from '../../../server/db/vault.ts';
import { checkpointKey, checkpointLogs } from '../../../server/handovers/checkpoint.ts';
import { verifyChain } from '../../../server/handovers/verifyChain.ts';
import { openPassphrase } from '../../../server/passphrases/sealPassphrase.ts';
import { useApp } from '../../support/app.ts';
import { at, boats } from '../../support/boat.ts';

const app = useApp();
const world = boats(app);
const run = promisify(execFile);
const env = { ...process.env, PATH: `${process.env.PATH}:/usr/lib/postgresql/15/bin` };
const name = `qw_test_${randomBytes(6).toString('hex')}_${Math.floor(Date.now() / 1000).toString(36)}`;

const inDatabase = (url: string, database: string): string => {
  const changed = new URL(url);
  changed.pathname = `/${database}`;
  return changed.href;
};
async function asOwner<T extends object>(database: string, sql: string): Promise<T[]> {
  const client = new pg.Client({ connectionString: inDatabase(app.ownerUrl, database) });
  await client.connect();
  try {
    return (await client.query<T>(sql)).rows;
  } finally {
    await client.end();
  }
}

const held: { folder: string; restored?: Database } = { folder: '' };
beforeAll(async () => {
  held.folder = await mkdtemp(path.join(os.tmpdir(), 'quayword-restore-'));
});
afterAll(async () => {
  await held.restored?.close();
  await asOwner('postgres', `DROP DATABASE IF EXISTS ${name}`);
  await rm(held.folder, { recursive: true, force: true });
});

/** Rows of every table, the server's and the queue's. */
async function counts(url: string): Promise<Record<string, number>> {
  const client = new pg.Client({ connectionString: url });
  await client.connect();
  try {
    // The owner sees all rows only where the fences are told to let everything through, as jobs do.
    await client.query("SELECT set_config('quayword.scope', 'system', false)");
    const { rows: tables } = await client.query<{ name: string }>(
      "SELECT format('%I.%I', schemaname, tablename) AS name FROM pg_tables WHERE schemaname IN ('public','pgboss') ORDER BY 1",
    );
    const found: Record<string, number> = {};
    for (const table of tables) {
      const { rows } = await client.query<{ rows: number }>(
        `SELECT count(*)::int AS rows FROM ${table.name}`,
      );
      found[table.name] = rows[0]?.rows ?? 0;
    }
    return found;
  } finally {
    await client.end();
  }
}

test('R60: a dump, restored as README says, has every row, a log that holds, and opens with its keys alone', async () => {
  const boat = await world.boat();
  const captain = await boat.as('captain');
  await captain
    .post(`${boat.base}/networks/${boat.networks.guest.id}/cards/print`, {
      guestIds: [at(boat.guests, 0).id, at(boat.guests, 1).id],
      format: 'wallet',
    })
    .expect(200);
  await captain.post(`${boat.base}/networks/${boat.networks.guest.id}/reveal`).expect(200);
  await checkpointLogs(app.services);
  const before = await counts(app.ownerUrl);
  expect(before['public.cards']).toBe(2);
  expect(before['public.log_entries']).toBeGreaterThan(2);

  const file = path.join(held.folder, 'quayword.dump');
  await run('pg_dump', ['--enable-row-security', '--format=custom', `--file=${file}`, app.ownerUrl], { env });
  await asOwner('postgres', `CREATE DATABASE ${name}`);
  await run('pg_restore', ['--exit-on-error', `--dbname=${inDatabase(app.ownerUrl, name)}`, file], { env });

  expect(await counts(inDatabase(app.ownerUrl, name))).toEqual(before);
  const restored = new Database(inDatabase(app.appUrl, name));
  held.restored = restored;
  await checkKeys(restored, app.services.vault);
  const verdict = await restored.transaction({ kind: 'system' }, (tx) =>
    verifyChain(restored, tx, boat.vesselId, {
      key: checkpointKey(app.services.config.logSigningSeed),
      outside: [],
    }),
  );
  expect(verdict).toMatchObject({ bad: null, checkpoints: 1 });
  const passphrase = await restored.transaction({ kind: 'vessel', vesselId: boat.vesselId }, (tx) =>
    openPassphrase({ ...app.services, db: restored }, tx, boat.networks.guest.passphraseId),
  );
  expect(passphrase).toBe(boat.networks.guest.passphrase);
  // The fences stand as before: without a scope, and to another vessel, there is nothing.
  expect(
    await restored.transaction({ kind: 'none' }, (tx) => restored.rows(tx, 'SELECT 1 FROM networks')),
  ).toEqual([]);
  await expect(
    restored.transaction({ kind: 'system' }, (tx) => restored.run(tx, 'DELETE FROM log_entries')),
  ).rejects.toThrow(/permission denied/);
  const wrong = new Vault(
    { current: 'v1', keys: new Map([['v1', randomBytes(32)]]) },
    app.services.config.fingerprintKey,
  );
  await expect(checkKeys(restored, wrong)).rejects.toThrow(VaultError);
}, 60_000);
