import { randomBytes } from 'node:crypto';
import { Client } from 'pg';

export interface ScratchDatabase {
  readonly ownerUrl: string;
  readonly appUrl: string;
  drop(): Promise<void>;
}

/** An empty database of its own on the server that the set-up provides, for one run of a command. */
export async function scratchDatabase(name: string): Promise<ScratchDatabase> {
  const { DATABASE_URL: owner, DATABASE_APP_URL: app } = process.env;
  if (!owner || !app) throw new Error('Run this by its npm command: the database server is not set up.');
  const own = `quayword_${name}_${randomBytes(4).toString('hex')}`;
  const inOwn = (url: string) => {
    const changed = new URL(url);
    changed.pathname = `/${own}`;
    return changed.href;
  };
  const asOwner = async (sql: string) => {
    const client = new Client({ connectionString: owner });
    await client.connect();
    try {
      await client.query(sql);
    } finally {
      await client.end();
    }
  };
  await asOwner(`CREATE DATABASE ${own}`);
  return {
    ownerUrl: inOwn(owner),
    appUrl: inOwn(app),
    drop: async () => {
      // Without FORCE it sends the server's own cleaners away, with FORCE connections that a dead process left.
      try {
        await asOwner(`DROP DATABASE IF EXISTS ${own}`);
      } catch {
        await asOwner(`DROP DATABASE IF EXISTS ${own} WITH (FORCE)`);
      }
    },
  };
}
