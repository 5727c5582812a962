import { type ChildProcess, spawn } from 'node:child_process';
import { chmodSync, mkdtempSync, rmSync } from 'node:fs';
import { createServer, type Server } from 'node:net';
import os from 'node:os';
import path from 'node:path';
import { fileURLToPath } from 'node:url';
import { Client } from 'pg';
import { afterAll } from 'vitest';
import { databaseUp } from '../../server/bin/database.mjs';

const ROOT = fileURLToPath(new URL('../..', import.meta.url));

/** A folder of one test file, which the database's user may walk through; removed at the end. */
export function testFolder(): string {
  const folder = mkdtempSync(path.join(os.tmpdir(), 'quayword-setup-'));
  chmodSync(folder, 0o711);
  afterAll(() => rmSync(folder, { recursive: true, force: true }));
  return folder;
}

interface Ended {
  code: number | null;
  out: string;
}

/** A set-up program as a person starts it: none of the test run's own settings reach it. */
export function started(
  args: string[],
  env: NodeJS.ProcessEnv = {},
): { child: ChildProcess; ended: Promise<Ended> } {
  const own = Object.entries(process.env).filter(
    ([name]) => !/^(QW_|VITEST|NODE_ENV|DATABASE_|PORT$)/.test(name),
  );
  const child = spawn(process.execPath, args, { cwd: ROOT, env: { ...Object.fromEntries(own), ...env } });
  let out = '';
  for (const stream of [child.stdout, child.stderr]) stream.on('data', (part: Buffer) => (out += part));
  const ended = new Promise<Ended>((resolve) => child.once('close', (code) => resolve({ code, out })));
  return { child, ended };
}

/** Waits for a sentence on a program's output; fails when it ends without having said it. */
export function said(child: ChildProcess, sentence: RegExp): Promise<void> {
  return new Promise((resolve, reject) => {
    let out = '';
    child.stdout?.on('data', (part: Buffer) => {
      out += part;
      if (sentence.test(out)) resolve();
    });
    child.stderr?.on('data', (part: Buffer) => (out += part));
    child.once('close', () => reject(new Error(`It ended without saying ${sentence}:\n${out}`)));
  });
}

/** A listener on a port of loopback, any free one unless told. */
export function listening(port = 0): Promise<{ server: Server; port: number }> {
  return new Promise((resolve, reject) => {
    const server = createServer();
    server.once('error', reject);
    server.listen(port, '127.0.0.1', () => {
      const address = server.address();
      if (address === null || typeof address === 'string') reject(new Error('no port'));
      else resolve({ server, port: address.port });
    });
  });
}

/** The first of `count` neighbouring ports that are free just now. */
export async function freePorts(count: number): Promise<number> {
  const first = await listening();
  const held = [first.server];
  try {
    for (let next = 1; next < count; next += 1) held.push((await listening(first.port + next)).server);
    return first.port;
  } catch {
    return await freePorts(count);
  } finally {
    for (const server of held) server.close();
  }
}

/** The rows of one statement on a connection of its own. */
export async function ask(url: string, sql: string): Promise<Record<string, unknown>[]> {
  const client = new Client({ connectionString: url });
  await client.connect();
  try {
    return (await client.query(sql)).rows;
  } finally {
    await client.end();
  }
}

/** The local database of a folder, without durability. */
export const quickDatabase = (dir: string, firstPort: number) =>
  databaseUp({ dir, name: 'quayword', log: () => undefined, fast: true, firstPort });
