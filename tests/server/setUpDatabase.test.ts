import { chmodSync, existsSync, mkdirSync, readFileSync, rmSync, statSync, writeFileSync } from 'node:fs';
import type { Server } from 'node:net';
import path from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { ask, listening, quickDatabase, started, testFolder } from '../support/programs.ts';

// The project's own rule for `npm start` (PostgreSQL on loopback only); common practice, no source, for the rest.

const folder = testFolder();

describe('the local database', () => {
  const dir = path.join(folder, 'data');
  let taken: Server;
  let port: number;

  beforeAll(async () => {
    ({ server: taken, port } = await listening());
  });
  afterAll(() => taken.close());

  test('moves past a taken port, is reused, ends with the call that started it, and keeps its data', async () => {
    const first = await quickDatabase(dir, port);
    expect(Number(new URL(first.ownerUrl).port)).toBeGreaterThan(port);
    expect(new URL(first.ownerUrl).hostname).toBe('127.0.0.1');
    await ask(first.ownerUrl, "CREATE TABLE kept AS SELECT 'still here' AS word");

    const second = await quickDatabase(dir, port);
    expect(second.ownerUrl).toBe(first.ownerUrl);
    await second.stop();
    expect(await ask(first.ownerUrl, 'SELECT word FROM kept')).toEqual([{ word: 'still here' }]);

    await first.stop();
    await expect(ask(first.ownerUrl, 'SELECT 1')).rejects.toThrow('ECONNREFUSED');

    // A power cut leaves a pid file; after a reboot its pid is some other program's, here this one's.
    const lines = [process.pid, first.dataDir, 1, port, '', '127.0.0.1', '', 'ready'];
    writeFileSync(path.join(first.dataDir, 'postmaster.pid'), `${lines.join('\n')}\n`);
    const third = await quickDatabase(dir, port);
    expect(await ask(third.ownerUrl, 'SELECT word FROM kept')).toEqual([{ word: 'still here' }]);
    await third.stop();
  });

  test('has two roles of no more rights than they need, and lets nobody in as superuser (R47)', async () => {
    const database = await quickDatabase(dir, port);
    try {
      const roles = await ask(
        database.ownerUrl,
        `SELECT rolname, rolsuper, rolbypassrls, rolcreaterole FROM pg_roles WHERE rolname LIKE 'quayword%' ORDER BY 1`,
      );
      expect(roles).toEqual([
        { rolname: 'quayword_app', rolsuper: false, rolbypassrls: false, rolcreaterole: false },
        { rolname: 'quayword_owner', rolsuper: false, rolbypassrls: false, rolcreaterole: true },
      ]);
      await expect(ask(database.appUrl, 'CREATE TABLE mine (id int)')).rejects.toThrow('permission denied');
      await ask(database.ownerUrl, 'CREATE EXTENSION IF NOT EXISTS citext');
      for (const password of ['', 'postgres']) {
        const superuser = new URL(database.ownerUrl);
        superuser.username = 'postgres';
        superuser.password = password;
        await expect(ask(superuser.href, 'SELECT 1')).rejects.toThrow(/password/);
      }
    } finally {
      await database.stop();
    }
  });

  test('keeps its secrets from other users, and makes passwords anew should they be lost', async () => {
    const file = path.join(dir, 'secrets.json');
    expect(statSync(file).mode & 0o777).toBe(0o600);
    const before = readFileSync(file, 'utf8');
    rmSync(file);
    const database = await quickDatabase(dir, port);
    expect(await ask(database.ownerUrl, 'SELECT word FROM kept')).toEqual([{ word: 'still here' }]);
    expect(readFileSync(file, 'utf8')).not.toBe(before);
    await database.discard();
    expect(existsSync(database.dataDir)).toBe(false);
  });

  test('is started once by two programs at once', async () => {
    const both = path.join(folder, 'both');
    const program = `
      import { databaseUp } from './server/bin/database.mjs';
      const { ownerUrl } = await databaseUp({ dir: ${JSON.stringify(both)}, name: 'quayword', log: () => {}, fast: true, firstPort: ${port} });
      console.log(new URL(ownerUrl).port);`;
    const args = ['--input-type=module', '-e', program];
    const [one, two] = await Promise.all([started(args).ended, started(args).ended]);
    const pid = Number(readFileSync(path.join(both, 'pg', 'postmaster.pid'), 'utf8').split('\n')[0]);
    process.kill(pid, 'SIGINT');
    expect([one.code, two.code, one.out]).toEqual([0, 0, two.out]);
  });

  test("lies elsewhere where the database's user may not walk, as below root's own folder", async () => {
    const closed = path.join(folder, 'closed');
    mkdirSync(closed, { mode: 0o700 });
    chmodSync(closed, 0o700);
    const database = await quickDatabase(path.join(closed, 'data'), port);
    const asRoot = process.getuid?.() === 0;
    expect(database.dataDir.startsWith(asRoot ? '/var/lib/quayword/' : closed)).toBe(true);
    expect(await ask(database.appUrl, 'SELECT 1 AS one')).toEqual([{ one: 1 }]);
    await database.discard();
    expect(existsSync(path.dirname(database.dataDir))).toBe(!asRoot);
  });
});
