import { createHash } from 'node:crypto';
import { readdirSync, readFileSync } from 'node:fs';
import os from 'node:os';
import path from 'node:path';
import { fileURLToPath } from 'node:url';
import { Client } from 'pg';
import type { TestProject } from 'vitest/node';
import { databaseUp } from '../../server/bin/database.mjs';
import { migrate } from '../../server/db/migrate.ts';

declare module 'vitest' {
  export interface ProvidedContext {
    ownerUrl: string;
    appUrl: string;
    template: string;
  }
}

const MIGRATIONS = fileURLToPath(new URL('../../server/migrations', import.meta.url));

function templateName(): string {
  const hash = createHash('sha256');
  for (const file of [
    ...readdirSync(MIGRATIONS)
      .sort()
      .map((name) => path.join(MIGRATIONS, name)),
    path.join(MIGRATIONS, '../jobs/queues.ts'),
    path.join(MIGRATIONS, '../db/migrate.ts'),
  ]) {
    hash.update(readFileSync(file));
  }
  return `qw_template_${hash.digest('hex').slice(0, 12)}`;
}

const HOUR_SECONDS = 3600;

const withDatabase = (url: string, name: string): string => {
  const changed = new URL(url);
  changed.pathname = `/${name}`;
  return changed.href;
};

/** Drops what broken-off runs and older schemas left behind: clones after an hour, templates after a day. */
async function dropStale(client: Client, template: string): Promise<void> {
  const { rows } = await client.query<{ name: string; made: string | null }>(
    `SELECT datname AS name, shobj_description(d.oid, 'pg_database') AS made FROM pg_database d
     WHERE datname ~ '^qw_(test|template)_' AND datname <> $1
       AND NOT EXISTS (SELECT 1 FROM pg_stat_activity a WHERE a.datid = d.oid)`,
    [template],
  );
  const now = Date.now() / 1000;
  for (const { name, made } of rows) {
    const stale = name.startsWith('qw_test_')
      ? Number.parseInt(name.split('_').at(-1) ?? '', 36) < now - HOUR_SECONDS
      : made !== null && Number(made) < now - 24 * HOUR_SECONDS;
    if (stale) await client.query(`DROP DATABASE IF EXISTS ${client.escapeIdentifier(name)}`);
  }
}

/** One PostgreSQL server and one migrated template for the whole run; each test file clones the template. */
export default async function setup(project: TestProject): Promise<void> {
  let ownerUrl = process.env.QW_TEST_OWNER_URL;
  let appUrl = process.env.QW_TEST_APP_URL;
  if (!ownerUrl || !appUrl) {
    const up = await databaseUp({
      dir: path.join(os.tmpdir(), `quayword-test-${os.userInfo().username}`),
      name: 'postgres',
      fast: true,
      log: () => undefined,
    });
    ownerUrl = up.ownerUrl;
    appUrl = up.appUrl;
  }
  const template = templateName();
  const client = new Client({ connectionString: withDatabase(ownerUrl, 'postgres') });
  await client.connect();
  try {
    await client.query('SELECT pg_advisory_lock(72019)');
    await dropStale(client, template);
    const made = await client.query('SELECT 1 FROM pg_database WHERE datname = $1', [template]);
    if (made.rowCount === 0) {
      const building = `${template}_new`;
      await client.query(`DROP DATABASE IF EXISTS ${building}`);
      await client.query(`CREATE DATABASE ${building}`);
      await migrate({ ownerUrl: withDatabase(ownerUrl, building), appUrl });
      await client.query(`COMMENT ON DATABASE ${building} IS '${Math.floor(Date.now() / 1000)}'`);
      await client.query(`ALTER DATABASE ${building} RENAME TO ${template}`);
    }
  } finally {
    await client.end();
  }
  project.provide('ownerUrl', ownerUrl);
  project.provide('appUrl', appUrl);
  project.provide('template', template);
}
