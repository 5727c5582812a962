import { expect, test } from 'vitest';
import { useApp } from '../../support/app.ts';
import {
  childEnv,
  countIn,
  judge,
  layDueChanges,
  startServerProcess,
  until,
} from '../../support/seaTrial.ts';

const app = useApp();

const sessions = async (condition: string) => {
  const [row] = await app.services.db.transaction({ kind: 'system' }, (tx) =>
    app.services.db.rows<{ count: number }>(
      tx,
      `SELECT count(*)::integer AS count FROM pg_stat_activity WHERE datname = current_database()
         AND pid <> pg_backend_pid() AND ${condition}`,
    ),
  );
  return row?.count ?? Number.NaN;
};
const inTransaction = () => sessions("state LIKE 'idle in transaction%'");
const advisoryLocks = () =>
  sessions("pid IN (SELECT l.pid FROM pg_locks l WHERE l.locktype = 'advisory' AND l.granted)");

// SIGSTOP as on a machine that hangs, and on again once another server did the work (Kleppmann, "How to do distributed
// locking", 2016, for what a paused holder of a lock does when it wakes).
test('R51, R52: a server stopped with its locks held is not waited for, and what it writes on waking is refused', async () => {
  app.clock.set(new Date());
  const ids = await layDueChanges(app.services, 8);
  const env = childEnv(app.services.config);
  const live = (which: readonly string[]) => countIn(app.services, which, 'live');
  // S6: everything is handed out in a transaction that is not committed yet.
  const first = startServerProcess({ ...env, QW_FAULT_SIGNAL: 'SIGSTOP', TRANSACTION_IDLE_MS: '2000' }, 'S6');
  let second: typeof first | null = null;
  try {
    await until(60, 'the server stops at S6', async () => first.output().includes('stopping at S6'));
    expect(await countIn(app.services, ids, 'staged')).toBe(8);
    expect(await inTransaction()).toBeGreaterThan(0);
    await until(30, 'the database takes its transaction back', async () => (await inTransaction()) === 0);
    second = startServerProcess(env);
    await until(60, 'the other has all of them in force', async () => (await live(ids)) === 8);

    first.process.kill('SIGCONT');
    await until(30, 'its transaction is refused', async () => first.output().includes('tick failed'));
    expect(await judge(app.services, ids)).toEqual({ lost: [], lockedOut: [] });
    // Awake again it looks for work as before and goes on serving.
    const more = await layDueChanges(app.services, 4);
    await until(60, 'what comes after is done too', async () => (await live(more)) === 4);
    expect(await judge(app.services, [...ids, ...more])).toEqual({ lost: [], lockedOut: [] });
  } finally {
    for (const server of [first, second]) {
      server?.process.kill('SIGCONT');
      server?.process.kill('SIGTERM');
    }
  }
  expect(await Promise.all([first.ended, second?.ended])).toEqual(['0', '0']);
  expect(await advisoryLocks()).toBe(0);
}, 240_000);
