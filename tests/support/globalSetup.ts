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

const withDatabase = (url: string, name: string): string => {
  const changed = new URL(url);
  changed.pathname = `/${name}`;
  return changed.href;
};

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
    const made = await client.query('SELECT 1 FROM pg_database WHERE datname = $1', [template]);
    if (made.rowCount === 0) {
      const building = `${template}_new`;
      await client.query(`DROP DATABASE IF EXISTS ${building}`);
      await client.query(`CREATE DATABASE ${building}`);
      await migrate({ ownerUrl: withDatabase(ownerUrl, building), appUrl });
      await client.query(`ALTER DATABASE ${building} RENAME TO ${template}`);
    }
  } finally {
    await client.end();
  }
  project.provide('ownerUrl', ownerUrl);
  project.provide('appUrl', appUrl);
  project.provide('template', template);
}
