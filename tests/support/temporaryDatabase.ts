import { randomBytes } from 'node:crypto';
import { Client } from 'pg';
import { migrate } from '../../server/db/migrate.ts';

/** A migrated database of its own for a command that is not a test, on the server of DATABASE_URL; drop it at the end. */
export async function temporaryDatabase(): Promise<{
  ownerUrl: string;
  appUrl: string;
  drop: () => Promise<void>;
}> {
  const { DATABASE_URL, DATABASE_APP_URL } = process.env;
  if (!DATABASE_URL || !DATABASE_APP_URL)
    throw new Error('Run this through its npm command, which starts the database.');
  const name = `qw_test_${randomBytes(6).toString('hex')}`;
  const at = (url: string, database: string) => {
    const changed = new URL(url);
    changed.pathname = `/${database}`;
    return changed.href;
  };
  const asOwner = async (sql: string) => {
    const client = new Client({ connectionString: at(DATABASE_URL, 'postgres') });
    await client.connect();
    try {
      await client.query(sql);
    } finally {
      await client.end();
    }
  };
  await asOwner(`CREATE DATABASE ${name}`);
  const urls = { ownerUrl: at(DATABASE_URL, name), appUrl: at(DATABASE_APP_URL, name) };
  await migrate(urls);
  return { ...urls, drop: () => asOwner(`DROP DATABASE IF EXISTS ${name}`) };
}
