import { execFile } from 'node:child_process';
import { mkdtemp, readFile, rm, stat } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { promisify } from 'node:util';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { testEnv } from '../../support/app.ts';
import { testDatabase } from '../../support/database.ts';

const run = promisify(execFile);
const SEED = fileURLToPath(new URL('../../../server/bin/seed.ts', import.meta.url));
const database = testDatabase();
let dir = '';

beforeAll(async () => {
  dir = await mkdtemp(join(tmpdir(), 'quayword-seed-'));
});
afterAll(async () => {
  await rm(dir, { recursive: true, force: true });
});

const keys = testEnv('');
const seed = (more: NodeJS.ProcessEnv = {}) =>
  run(process.execPath, ['--import', 'tsx', SEED], {
    env: { PATH: process.env.PATH, ...keys, DATABASE_APP_URL: database.appUrl, DATA_DIR: dir, ...more },
  });

test('refuses production, then lays the fleet and keeps the sign-ins for this user only, then has nothing to do', async () => {
  await expect(seed({ NODE_ENV: 'production' })).rejects.toMatchObject({
    code: 1,
    stderr: expect.stringContaining('NODE_ENV: the demo fleet is never laid in production'),
  });
  await expect(stat(join(dir, 'demo.json'))).rejects.toMatchObject({ code: 'ENOENT' });

  expect((await seed()).stdout).toBe('The demo fleet is laid: 46 vessels.\n');
  const file = join(dir, 'demo.json');
  expect((await stat(file)).mode & 0o777).toBe(0o600);
  const first = await readFile(file, 'utf8');
  const { people } = JSON.parse(first) as { people: Record<string, unknown>[] };
  expect(people).toHaveLength(8);
  expect(people[0]).toEqual({
    name: 'Joaquim Sato',
    role: 'Dealer, service desk',
    vessel: 'Halden & Roe Marine Systems',
    email: 'joaquim.sato@haldenroe.example',
    password: expect.stringMatching(/^[a-z]+-[a-z]+-[a-z]+-\d\d$/),
  });
  expect(new Set(people.map((person) => person.password)).size).toBe(8);

  expect((await seed()).stdout).toBe('');
  expect(await readFile(file, 'utf8')).toBe(first);
}, 90_000);

test('names every setting that is missing', async () => {
  await expect(seed({ VAULT_KEYS: '' })).rejects.toMatchObject({
    code: 1,
    stderr: expect.stringContaining('VAULT_KEYS: is not set'),
  });
});
