import { randomBytes, randomUUID } from 'node:crypto';
import { performance } from 'node:perf_hooks';
import { Client } from 'pg';
import PgBoss from 'pg-boss';
import { pino } from 'pino';
import { readConfig } from '../../server/config.ts';
import { Database } from '../../server/db/connection.ts';
import { migrate } from '../../server/db/migrate.ts';
import { Vault } from '../../server/db/vault.ts';
import { stageBatch } from '../../server/rotations/sweep.ts';
import type { Services } from '../../server/services.ts';
import { scratchDatabase } from '../support/scratchDatabase.ts';
import { layDueChanges } from '../support/seaTrial.ts';

const ROUNDS = 7;
/** Rotations taken in each round. */
const EACH = 4000;
/** Jobs of the queue taken in each round, as many as the floor was measured with. */
const JOBS = 20_000;
/** The queue's usual batch when taken for speed. */
const QUEUE_BATCH = 200;

const key = () => randomBytes(32).toString('base64');
const median = (values: readonly number[]) =>
  [...values].sort((one, other) => one - other)[Math.floor(values.length / 2)] ?? Number.NaN;

/**
 * Whole due rotations a second (claimed, a passphrase generated and sealed, all rows and the log entry written,
 * in the sweep's own batches) against empty jobs fetched and completed a second by the queue, both by two
 * workers, taken in turn on one database. Everything is laid before the clock starts.
 */
export async function bench(): Promise<Record<string, number>> {
  const database = await scratchDatabase('bench');
  try {
    await migrate(database);
    const config = readConfig({
      NODE_ENV: 'test',
      DATABASE_APP_URL: database.appUrl,
      SESSION_KEYS: `s1:${key()}`,
      VAULT_KEYS: `v1:${key()}`,
      FINGERPRINT_KEY: key(),
      PASSWORD_PEPPER: key(),
      LOG_SIGNING_SEED: key(),
    });
    const db = new Database(config.databaseUrl, { poolMax: 2 });
    const owner = new Client({ connectionString: database.ownerUrl });
    await owner.connect();
    const boss = new PgBoss({
      connectionString: database.ownerUrl,
      schema: 'pgboss',
      migrate: false,
      supervise: false,
      schedule: false,
      max: 2,
    });
    boss.on('error', (error) => console.error(error.name));
    await boss.start();
    const services: Services = {
      config,
      db,
      vault: new Vault(config.vaultKeys, config.fingerprintKey),
      clock: { now: () => new Date() },
      log: pino({ level: 'silent' }),
      enqueue: async () => undefined,
    };
    try {
      await boss.createQueue('bench.empty');
      return await rounds(services, boss, owner);
    } finally {
      await boss.stop({ graceful: false, close: true });
      await owner.end();
      await db.close();
    }
  } finally {
    await database.drop();
  }
}

async function rounds(services: Services, boss: PgBoss, owner: Client): Promise<Record<string, number>> {
  const ours: number[] = [];
  const theirs: number[] = [];
  for (let round = 0; round <= ROUNDS; round++) {
    await layDueChanges(services, EACH);
    await boss.insert(Array.from({ length: JOBS }, () => ({ id: randomUUID(), name: 'bench.empty' })));
    // What autovacuum does within a minute of so many rows; foreign keys are checked by full scans until then.
    await owner.query('ANALYZE');
    const one = EACH / (await seconds(() => stageEverything(services)));
    const other = JOBS / (await seconds(() => takeJobs(boss)));
    // The first round only warms up.
    if (round === 0) continue;
    ours.push(one);
    theirs.push(other);
    console.log(`round ${round} of ${ROUNDS}: ${Math.round(one)} rotations/s, ${Math.round(other)} jobs/s`);
  }
  const rotationsPerSecond = Math.round(median(ours));
  const queuePerSecond = Math.round(median(theirs));
  return {
    rotationsPerSecond,
    queuePerSecond,
    ratio: Math.round(median(ours.map((one, index) => one / (theirs[index] ?? Number.NaN))) * 100) / 100,
    rounds: ROUNDS,
  };
}

/** The sweep's own two lanes. */
async function stageEverything(services: Services): Promise<void> {
  const done = await twice(async () => {
    let staged = 0;
    for (;;) {
      const batch = await services.db.transaction({ kind: 'system' }, (tx) =>
        stageBatch(services, tx, { now: services.clock.now(), actor: null }),
      );
      staged += batch.done;
      if (!batch.more) return staged;
    }
  });
  if (done !== EACH) throw new Error(`${done} rotations were staged instead of ${EACH}`);
}

async function takeJobs(boss: PgBoss): Promise<void> {
  const done = await twice(async () => {
    let taken = 0;
    for (;;) {
      const jobs = await boss.fetch('bench.empty', { batchSize: QUEUE_BATCH });
      if (jobs.length === 0) return taken;
      await boss.complete(
        'bench.empty',
        jobs.map((job) => job.id),
      );
      taken += jobs.length;
    }
  });
  if (done !== JOBS) throw new Error(`${done} jobs were taken instead of ${JOBS}`);
}

async function twice(lane: () => Promise<number>): Promise<number> {
  const counts = await Promise.all([lane(), lane()]);
  return counts.reduce((total, count) => total + count, 0);
}

async function seconds(work: () => Promise<void>): Promise<number> {
  const start = performance.now();
  await work();
  return (performance.now() - start) / 1000;
}
