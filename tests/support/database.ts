import { randomBytes } from 'node:crypto';
import { Client } from 'pg';
import { afterAll, beforeAll, inject } from 'vitest';

export interface TestDatabase {
  name: string;
  ownerUrl: string;
  appUrl: string;
}

const withDatabase = (url: string, name: string): string => {
  const changed = new URL(url);
  changed.pathname = `/${name}`;
  return changed.href;
};

async function asOwner(work: (client: Client) => Promise<void>): Promise<void> {
  const client = new Client({ connectionString: withDatabase(inject('ownerUrl'), 'postgres') });
  await client.connect();
  try {
    await work(client);
  } finally {
    await client.end();
  }
}

/** A database of its own for one test file, cloned from the migrated template and dropped at the end. */
export function testDatabase(): TestDatabase {
  const database: TestDatabase = {
    // The end of the name is the second it was made in, so that a later run can tell what was left behind.
    name: `qw_test_${randomBytes(6).toString('hex')}_${Math.floor(Date.now() / 1000).toString(36)}`,
    ownerUrl: '',
    appUrl: '',
  };
  beforeAll(async () => {
    await asOwner(async (client) => {
      // Cloning needs the template to itself for a moment, so files take turns.
      await client.query('SELECT pg_advisory_lock(72020)');
      await client.query(`CREATE DATABASE ${database.name} TEMPLATE ${inject('template')}`);
    });
    database.ownerUrl = withDatabase(inject('ownerUrl'), database.name);
    database.appUrl = withDatabase(inject('appUrl'), database.name);
  });
  afterAll(async () => {
    await asOwner(async (client) => {
      // WITH (FORCE) would also try to end the superuser's vacuum, which only a plain DROP may do.
      await client.query(
        "SELECT pg_terminate_backend(pid) FROM pg_stat_activity WHERE datname = $1 AND backend_type = 'client backend'",
        [database.name],
      );
      await client.query(`DROP DATABASE IF EXISTS ${database.name}`);
    });
  });
  return database;
}
