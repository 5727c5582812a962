import { randomBytes } from 'node:crypto';
import { existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs';
import path from 'node:path';
import { databaseUp } from './database.mjs';
import { DATA, SetUpError, say } from './setUp.mjs';

/** Starts the local database, or uses the server named by DATABASE_URL. */
export async function databaseForServer() {
  if (process.env.DATABASE_URL) {
    const appUrl = process.env.DATABASE_APP_URL ?? (await applicationRole(process.env.DATABASE_URL));
    return { ownerUrl: process.env.DATABASE_URL, appUrl, stop: async () => undefined };
  }
  return databaseUp({ dir: DATA, name: 'quayword', log: say });
}

/** Makes the application's log-in role on somebody's own server, or says which SQL makes it. */
async function applicationRole(ownerUrl) {
  const { Client } = await import('pg');
  mkdirSync(DATA, { recursive: true });
  const file = path.join(DATA, 'application-role.json');
  const client = new Client({ connectionString: ownerUrl, connectionTimeoutMillis: 5_000 });
  try {
    await client.connect();
  } catch (error) {
    throw new SetUpError(
      `DATABASE_URL cannot be reached (${error.code ?? error.message}). Correct it, or unset it to use a local database.`,
    );
  }
  try {
    const name = `${client.database}_app`.replace(/[^a-z0-9_]/gi, '_');
    const known = existsSync(file) ? JSON.parse(readFileSync(file, 'utf8')) : {};
    const password = known[name] ?? randomBytes(24).toString('hex');
    const made = await client.query('SELECT 1 FROM pg_roles WHERE rolname = $1', [name]);
    const sql = `${made.rowCount ? 'ALTER' : 'CREATE'} ROLE ${client.escapeIdentifier(name)} LOGIN NOSUPERUSER NOBYPASSRLS PASSWORD '${password}'`;
    try {
      if (!made.rowCount || !known[name]) await client.query(sql);
    } catch {
      throw new SetUpError(
        `The role of DATABASE_URL may not create roles. Have its administrator run\n  CREATE ROLE ${name} LOGIN NOSUPERUSER NOBYPASSRLS PASSWORD '…';\n  CREATE ROLE quayword_application NOLOGIN; GRANT quayword_application TO ${name};\nthen set DATABASE_APP_URL to that role's connection and run the command again.`,
      );
    }
    writeFileSync(file, JSON.stringify({ ...known, [name]: password }), { mode: 0o600 });
    const url = new URL(ownerUrl);
    url.username = name;
    url.password = password;
    return url.href;
  } finally {
    await client.end();
  }
}
