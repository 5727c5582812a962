import { execFile } from 'node:child_process';
import { mkdtemp, rm, writeFile } from 'node:fs/promises';
import os from 'node:os';
import path from 'node:path';
import { promisify } from 'node:util';
import pg from 'pg';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { appendLog } from '../../../server/handovers/appendLog.ts';
import {
  type Checkpoint,
  checkpointKey,
  checkpointLogs,
  signCheckpoint,
} from '../../../server/handovers/checkpoint.ts';
import { type Verdict, verifyChain } from '../../../server/handovers/verifyChain.ts';
import { testEnv, useApp, uuid } from '../../support/app.ts';
import { factories } from '../../support/factories.ts';

const app = useApp({ spoilsLogs: true });
const make = factories(app);
let owner: pg.Client;

beforeAll(async () => {
  owner = new pg.Client({ connectionString: app.ownerUrl });
  await owner.connect();
});
afterAll(() => owner.end());

const system = <T>(work: Parameters<typeof app.services.db.transaction<T>>[1]) =>
  app.services.db.transaction({ kind: 'system' }, work);

/** A vessel whose log holds this many entries, every second one with a name. */
async function vesselWithLog(entries: number): Promise<string> {
  const vesselId = await make.vessel();
  await system((tx) =>
    appendLog(
      app.services,
      tx,
      Array.from({ length: entries }, (_one, index) => ({
        vesselId,
        kind: 'vessel.changed' as const,
        at: new Date(app.clock.now().getTime() + index),
        ...(index % 2 === 0
          ? { actor: { id: '00000000-0000-4000-8000-000000000001', name: `Ines Okafor-Lund ${index}` } }
          : {}),
        body: { what: `entry ${index + 1}` },
      })),
    ),
  );
  return vesselId;
}

const verify = (vesselId: string, outside: readonly Checkpoint[] = []): Promise<Verdict> =>
  system((tx) =>
    verifyChain(app.services.db, tx, vesselId, {
      key: checkpointKey(app.services.config.logSigningSeed),
      outside,
    }),
  );

/** What somebody with the database owner's rights can do: the triggers that refuse are set aside. */
async function asOwner(sql: string, values: unknown[]): Promise<void> {
  await owner.query('ALTER TABLE log_entries DISABLE TRIGGER USER');
  try {
    await owner.query(sql, values);
  } finally {
    await owner.query('ALTER TABLE log_entries ENABLE TRIGGER USER');
  }
}

/** A signed head as it stands, kept outside the database. */
async function headOutside(vesselId: string): Promise<Checkpoint> {
  const { rows } = await owner.query('SELECT seq, hash FROM log_heads WHERE vessel_id = $1', [vesselId]);
  return signCheckpoint(app.services.config.logSigningSeed, {
    vesselId,
    seq: Number(rows[0].seq),
    hash: rows[0].hash.toString('hex'),
    at: app.clock.now().toISOString(),
  });
}

describe('R46: an owner of the database cannot change the log unseen', () => {
  test('an untouched log holds, in full, over more than one page of reading', async () => {
    const vesselId = await vesselWithLog(4500);
    expect(await verify(vesselId, [await headOutside(vesselId)])).toMatchObject({
      entries: 4500,
      checkpoints: 1,
      bad: null,
    });
  }, 30_000);

  const FIELDS: readonly (readonly [string, string])[] = [
    ['kind', "'handover.card'"],
    ['at', "at + interval '1 millisecond'"],
    ['at', "at + interval '1 microsecond'"],
    ['body', `body || '{"what":"something else"}'`],
    ['actor_id', "'00000000-0000-4000-8000-000000000009'"],
    ['network_id', "'00000000-0000-4000-8000-000000000009'"],
    ['passphrase_id', "'00000000-0000-4000-8000-000000000009'"],
    ['subject_kind', "'guest'"],
    ['subject_id', "'00000000-0000-4000-8000-000000000009'"],
    ['hash', 'sha256(hash)'],
    ['prev_hash', 'sha256(hash)'],
  ];
  test.each(FIELDS)('a changed %s (%s) is found at its own entry', async (field, value) => {
    const vesselId = await vesselWithLog(7);
    await asOwner(`UPDATE log_entries SET ${field} = ${value} WHERE vessel_id = $1 AND seq = 4`, [vesselId]);
    expect(await verify(vesselId)).toMatchObject({ entries: 3, bad: { seq: 4 } });
  });

  test('a changed name is found, an erased one is not a fault (R49)', async () => {
    const vesselId = await vesselWithLog(7);
    const third = '(SELECT id FROM log_entries WHERE vessel_id = $1 AND seq = 3)';
    await asOwner(`UPDATE log_names SET name = 'Somebody Else' WHERE entry_id = ${third}`, [vesselId]);
    expect((await verify(vesselId)).bad).toEqual({
      seq: 3,
      why: 'a name kept with it is not the one that was written',
    });
    await asOwner(`DELETE FROM log_names WHERE entry_id = ${third}`, [vesselId]);
    expect((await verify(vesselId)).bad).toBeNull();
  });

  test.each([
    ['the first', 1],
    ['one in the middle', 4],
  ] as const)('%s entry deleted is found', async (_which, seq) => {
    const vesselId = await vesselWithLog(7);
    await asOwner('DELETE FROM log_names WHERE vessel_id = $1', [vesselId]);
    await asOwner('DELETE FROM log_entries WHERE vessel_id = $1 AND seq = $2', [vesselId, seq]);
    expect(await verify(vesselId)).toMatchObject({ entries: seq - 1, bad: { seq } });
  });

  test('the tail cut off is found by the head, and by the signed head when that was put back as well', async () => {
    const vesselId = await vesselWithLog(7);
    const outside = [await headOutside(vesselId)];
    await asOwner('DELETE FROM log_names WHERE vessel_id = $1', [vesselId]);
    await asOwner('DELETE FROM log_entries WHERE vessel_id = $1 AND seq > 5', [vesselId]);
    expect((await verify(vesselId)).bad).toEqual({ seq: 6, why: 'entries are missing at the end' });
    await asOwner(
      `UPDATE log_heads SET seq = 5, hash = (SELECT hash FROM log_entries WHERE vessel_id = $1 AND seq = 5)
       WHERE vessel_id = $1`,
      [vesselId],
    );
    expect((await verify(vesselId)).bad).toBeNull();
    expect((await verify(vesselId, outside)).bad).toEqual({
      seq: 6,
      why: 'entries that a signed checkpoint knows are missing at the end',
    });
  });

  test('two entries swapped are found', async () => {
    const vesselId = await vesselWithLog(7);
    await asOwner('UPDATE log_entries SET seq = -seq WHERE vessel_id = $1 AND seq IN (3, 5)', [vesselId]);
    await asOwner('UPDATE log_entries SET seq = 8 + seq WHERE vessel_id = $1 AND seq < 0', [vesselId]);
    expect(await verify(vesselId)).toMatchObject({ entries: 2, bad: { seq: 3 } });
  });

  test('an entry put in between is found', async () => {
    const vesselId = await vesselWithLog(7);
    await asOwner('UPDATE log_entries SET seq = -seq - 1 WHERE vessel_id = $1 AND seq > 3', [vesselId]);
    await asOwner('UPDATE log_entries SET seq = -seq WHERE vessel_id = $1 AND seq < 0', [vesselId]);
    await asOwner(
      `INSERT INTO log_entries(id, vessel_id, seq, at, kind, body, prev_hash, hash)
       SELECT gen_random_uuid(), vessel_id, 4, at, 'card.lost', '{}', sha256(hash), sha256(prev_hash)
       FROM log_entries WHERE vessel_id = $1 AND seq = 3`,
      [vesselId],
    );
    expect(await verify(vesselId)).toMatchObject({ entries: 3, bad: { seq: 4 } });
  });

  test('an entry of another vessel put at the end does not follow', async () => {
    const [one, other] = [await vesselWithLog(3), await vesselWithLog(4)];
    await asOwner('UPDATE log_entries SET vessel_id = $1 WHERE vessel_id = $2 AND seq = 4', [one, other]);
    expect(await verify(one)).toMatchObject({ entries: 3, bad: { seq: 4 } });
  });

  test('a log written anew from the start, hashes and all, is caught by the signed head kept outside', async () => {
    const vesselId = await vesselWithLog(5);
    const outside = [await headOutside(vesselId)];
    await asOwner('DELETE FROM log_names WHERE vessel_id = $1', [vesselId]);
    await asOwner('DELETE FROM log_entries WHERE vessel_id = $1', [vesselId]);
    await asOwner("UPDATE log_heads SET seq = 0, hash = sha256('Quayword log'::bytea) WHERE vessel_id = $1", [
      vesselId,
    ]);
    await system((tx) =>
      appendLog(
        app.services,
        tx,
        Array.from({ length: 5 }, () => ({ vesselId, kind: 'vessel.changed' as const, at: app.clock.now() })),
      ),
    );
    expect((await verify(vesselId)).bad).toBeNull();
    const caught = { seq: 5, why: 'a signed checkpoint knows another entry here' };
    expect((await verify(vesselId, outside)).bad).toEqual(caught);
    // Also when the server has signed the new log in good faith.
    expect((await verify(vesselId, [...outside, await headOutside(vesselId)])).bad).toEqual(caught);
  });

  test('a checkpoint signed by somebody else is told, not believed', async () => {
    const vesselId = await vesselWithLog(3);
    const head = await headOutside(vesselId);
    const forged = signCheckpoint(Buffer.alloc(32, 7), { ...head, seq: 9 });
    const verdict = await verify(vesselId, [forged]);
    expect(verdict).toMatchObject({ entries: 3, checkpoints: 0 });
    expect(verdict.bad?.why).toBe('a checkpoint carries a signature that is not ours');
  });
});

describe('signed heads', () => {
  test('the hourly tick signs what grew, once, into the database and a file; the command compares both', async () => {
    const folder = await mkdtemp(path.join(os.tmpdir(), 'quayword-heads-'));
    try {
      const grown = await vesselWithLog(3);
      const services = { ...app.services, config: { ...app.services.config, checkpointDir: folder } };
      expect(await checkpointLogs(services)).toBeGreaterThan(0);
      expect(await checkpointLogs(services)).toBe(0);
      expect(await verify(grown)).toMatchObject({ entries: 3, checkpoints: 1, bad: null });

      const run = (vesselId = grown): Promise<{ code: number; stdout: string }> =>
        promisify(execFile)(process.execPath, ['--import', 'tsx', 'server/bin/verifyLog.ts', vesselId], {
          env: {
            ...process.env,
            ...testEnv(app.appUrl),
            LOG_SIGNING_SEED: app.services.config.logSigningSeed.toString('base64'),
            CHECKPOINT_DIR: folder,
          },
        }).then(
          ({ stdout }) => ({ code: 0, stdout }),
          (error: { code: number; stdout: string }) => error,
        );
      // The folder holds the heads of every other vessel as well.
      expect((await run()).stdout).toMatch(/^3 entries of 1 logs hold, compared with \d+ checkpoints/);
      // A log that is not there at all, though its head was signed for.
      const gone = uuid();
      const head = { vesselId: gone, seq: 7, hash: '00'.repeat(32), at: app.clock.now().toISOString() };
      const seed = app.services.config.logSigningSeed;
      await writeFile(path.join(folder, `${gone}.jsonl`), `${JSON.stringify(signCheckpoint(seed, head))}\n`);
      const lost = await run(gone);
      expect(lost.code).toBe(1);
      expect(lost.stdout).toContain(`${gone}: the whole log is gone; 7 entries of it had been signed for`);
      await asOwner(`UPDATE log_entries SET kind = 'card.lost' WHERE vessel_id = $1 AND seq = 2`, [grown]);
      const bad = await run();
      expect(bad.code).toBe(1);
      expect(bad.stdout).toContain(`(${grown}): entry 2: its content is not what was written`);
    } finally {
      await rm(folder, { recursive: true, force: true });
    }
  }, 30_000);
});

describe('R48: many writers at once', () => {
  test('20 writers of 50 events each, some of them taken back, leave a log without a gap or a fork', async () => {
    const vesselId = await make.vessel();
    const event = (writer: number, turn: number) => ({
      vesselId,
      kind: 'vessel.changed' as const,
      at: app.clock.now(),
      body: { what: `writer ${writer}, turn ${turn}` },
    });
    const rolledBack = new Error('taken back');
    const write = async (writer: number): Promise<void> => {
      for (let turn = 0; turn < 50; turn += 1) {
        const takeBack = (writer + turn) % 5 === 0;
        await system(async (tx) => {
          await appendLog(app.services, tx, [event(writer, turn)]);
          if (takeBack) throw rolledBack;
        }).catch((error: unknown) => {
          if (error !== rolledBack) throw error;
        });
      }
    };
    // Eight connections serve twenty writers; who waits too long for one is refused, so they come in turns.
    for (const first of [0, 5, 10, 15]) {
      await Promise.all([0, 1, 2, 3, 4].map((index) => write(first + index)));
    }
    expect(await verify(vesselId)).toMatchObject({ entries: 800, bad: null });
    const { rows } = await owner.query(
      `SELECT count(*)::int AS entries, max(seq)::int AS last, count(DISTINCT body->>'what')::int AS different
       FROM log_entries WHERE vessel_id = $1`,
      [vesselId],
    );
    expect(rows).toEqual([{ entries: 800, last: 800, different: 800 }]);
  }, 60_000);
});

describe('R47: the server’s own role cannot touch what is written', () => {
  const DENIED = [
    "UPDATE log_entries SET kind = 'card.lost'",
    'DELETE FROM log_entries',
    'TRUNCATE log_entries',
    'TRUNCATE log_entries CASCADE',
    'ALTER TABLE log_entries DISABLE TRIGGER ALL',
    'ALTER TABLE log_entries DISABLE ROW LEVEL SECURITY',
    'ALTER TABLE log_entries ADD COLUMN more text',
    'DROP TRIGGER log_entries_fixed ON log_entries',
    'DROP TABLE log_names',
    "UPDATE log_names SET name = 'Somebody Else'",
    'UPDATE log_checkpoints SET seq = 1',
    'DELETE FROM log_checkpoints',
    "SET session_replication_role = 'replica'",
    'CREATE TABLE mine (id integer)',
    "COPY log_entries TO PROGRAM 'cat'",
    'SET ROLE pg_write_all_data',
  ];
  test.each(DENIED)('%s', async (sql) => {
    const role = new pg.Client({ connectionString: app.appUrl });
    await role.connect();
    try {
      await role.query("SELECT set_config('quayword.scope', 'system', false)");
      await expect(role.query(sql)).rejects.toMatchObject({
        code: '42501',
      });
    } finally {
      await role.end();
    }
  });

  test('row security off gives an error instead of rows, and the role owns nothing and may bypass nothing', async () => {
    const role = new pg.Client({ connectionString: app.appUrl });
    await role.connect();
    try {
      await role.query('SET row_security = off');
      await expect(role.query('SELECT * FROM log_entries')).rejects.toMatchObject({ code: '42501' });
      const { rows } = await role.query(
        `SELECT rolsuper, rolbypassrls, rolcreatedb, rolcreaterole,
           (SELECT count(*)::int FROM pg_class WHERE relowner = r.oid AND relnamespace = 'public'::regnamespace) AS owns
         FROM pg_roles r WHERE rolname = current_user`,
      );
      expect(rows).toEqual([
        { rolsuper: false, rolbypassrls: false, rolcreatedb: false, rolcreaterole: false, owns: 0 },
      ]);
    } finally {
      await role.end();
    }
  });

  test('the rights on the log are these and no more, by the catalogue', async () => {
    const { rows } = await owner.query<{ table: string; rights: string }>(
      `SELECT table_name AS table, string_agg(privilege_type, ' ' ORDER BY privilege_type) AS rights
       FROM information_schema.role_table_grants
       WHERE grantee = 'quayword_application' AND table_name IN ('log_entries','log_names','log_checkpoints')
       GROUP BY table_name ORDER BY table_name`,
    );
    expect(rows).toEqual([
      { table: 'log_checkpoints', rights: 'INSERT SELECT' },
      { table: 'log_entries', rights: 'INSERT SELECT' },
      { table: 'log_names', rights: 'DELETE INSERT SELECT' },
    ]);
  });
});
