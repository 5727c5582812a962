import { Client } from 'pg';
import { afterAll, beforeAll } from 'vitest';
import type { TestApp } from '../../support/app.ts';

/** What the whole database holds, looked at as its owner: one hash a table, the queue's jobs included. */
export function contents(test: TestApp) {
  const held: { client?: Client; sql?: string } = {};
  const client = (): Client => {
    if (!held.client) throw new Error('The database is looked at inside a test');
    return held.client;
  };
  beforeAll(async () => {
    held.client = new Client({ connectionString: test.ownerUrl });
    await held.client.connect();
    const { rows } = await held.client.query<{ name: string }>(
      `SELECT format('%I.%I', schemaname, tablename) AS name FROM pg_tables
       WHERE schemaname = 'public' OR (schemaname = 'pgboss' AND tablename = 'job') ORDER BY 1`,
    );
    held.sql = rows
      .map(
        ({ name }) =>
          `SELECT '${name}' AS name, md5(coalesce(string_agg(t::text, '|' ORDER BY t::text), '')) AS hash FROM ${name} t`,
      )
      .join(' UNION ALL ');
  });
  afterAll(async () => {
    await held.client?.end();
  });
  return {
    /** Table → hash of all its rows. */
    async now(): Promise<Record<string, string>> {
      const { rows } = await client().query<{ name: string; hash: string }>(held.sql ?? '');
      return Object.fromEntries(rows.map(({ name, hash }) => [name, hash]));
    },
    asOwner: async <T extends object>(sql: string, values: unknown[] = []): Promise<T[]> =>
      (await client().query<T>(sql, values)).rows,
  };
}
