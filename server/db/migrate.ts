import { Client } from 'pg';
import PgBoss from 'pg-boss';
import { QUEUES } from '../jobs/queues.ts';
import { migrations } from '../migrations/index.ts';

export interface MigrateOptions {
  /** Connection of the role that owns the tables. */
  readonly ownerUrl: string;
  /** Connection of the role the server runs as; only its user name is used here. */
  readonly appUrl: string;
}

const LOCK = 7_201_931;

/** Brings the database to the newest shape. Safe to run on every start and from several servers at once. */
export async function migrate({ ownerUrl, appUrl }: MigrateOptions): Promise<string[]> {
  const client = new Client({ connectionString: ownerUrl });
  await client.connect();
  const done: string[] = [];
  try {
    await client.query('SELECT pg_advisory_lock($1)', [LOCK]);
    await client.query(
      'CREATE TABLE IF NOT EXISTS migrations (name text PRIMARY KEY, ran_at timestamptz NOT NULL DEFAULT now())',
    );
    await applicationRole(client, decodeURIComponent(new URL(appUrl).username));
    const ran = new Set(
      (await client.query<{ name: string }>('SELECT name FROM migrations')).rows.map((row) => row.name),
    );
    for (const migration of migrations) {
      if (ran.has(migration.name)) continue;
      await client.query('BEGIN');
      try {
        await client.query(migration.sql);
        await client.query('INSERT INTO migrations(name) VALUES ($1)', [migration.name]);
        await client.query('COMMIT');
      } catch (error) {
        await client.query('ROLLBACK');
        throw new Error(`Migration ${migration.name} failed`, { cause: error });
      }
      done.push(migration.name);
    }
    await queueTables(client, ownerUrl);
  } finally {
    await client.end();
  }
  return done;
}

/** The group role that holds the application's rights, with the server's log-in role as its member. */
async function applicationRole(client: Client, appUser: string): Promise<void> {
  const known = await client.query("SELECT 1 FROM pg_roles WHERE rolname = 'quayword_application'");
  if (known.rowCount === 0) {
    try {
      await client.query('CREATE ROLE quayword_application NOLOGIN');
    } catch (error) {
      // Another database of the same server was being migrated at the same moment.
      if (!(error instanceof Error && 'code' in error && (error.code === '42710' || error.code === '23505')))
        throw error;
    }
  }
  const member = await client.query("SELECT pg_has_role($1, 'quayword_application', 'MEMBER') AS yes", [
    appUser,
  ]);
  if (member.rows[0]?.yes !== true) {
    await client.query(`GRANT quayword_application TO ${client.escapeIdentifier(appUser)}`);
  }
}

/** The queue's own tables, made by the owner so that the application's role needs no right to create any. */
async function queueTables(client: Client, ownerUrl: string): Promise<void> {
  const boss = new PgBoss({
    connectionString: ownerUrl,
    schema: 'pgboss',
    max: 2,
    supervise: false,
    schedule: false,
  });
  boss.on('error', () => undefined);
  await boss.start();
  try {
    const existing = new Set((await boss.getQueues()).map((queue) => queue.name));
    for (const queue of QUEUES) if (!existing.has(queue.name)) await boss.createQueue(queue.name, queue);
  } finally {
    await boss.stop({ graceful: false, close: true });
  }
  await client.query(`
    GRANT USAGE ON SCHEMA pgboss TO quayword_application;
    GRANT SELECT, INSERT, UPDATE, DELETE ON ALL TABLES IN SCHEMA pgboss TO quayword_application;
    GRANT EXECUTE ON ALL FUNCTIONS IN SCHEMA pgboss TO quayword_application;
    GRANT USAGE ON ALL SEQUENCES IN SCHEMA pgboss TO quayword_application;`);
}
