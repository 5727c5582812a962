import { mkdir, rename, writeFile } from 'node:fs/promises';
import { join } from 'node:path';
import { pino } from 'pino';
import { Misconfigured, readConfig } from '../config.ts';
import { Database } from '../db/connection.ts';
import { checkKeys } from '../db/keyCheck.ts';
import { Vault } from '../db/vault.ts';
import { closeScorer } from '../passphrases/score.ts';
import { type DemoSignIn, layDemo } from '../seeders/layDemo.ts';
import { type Services, systemClock } from '../services.ts';

/** Lays the demo fleet, once; where it was laid before there is nothing to do. Settings as for the server. */
async function seed(): Promise<void> {
  if (process.env.NODE_ENV === 'production') {
    throw new Misconfigured([
      'NODE_ENV: the demo fleet is never laid in production; invite real people instead',
    ]);
  }
  const config = readConfig(process.env);
  const db = new Database(config.databaseUrl, { poolMax: 2 });
  const services: Services = {
    config,
    db,
    vault: new Vault(config.vaultKeys, config.fingerprintKey),
    clock: systemClock,
    log: pino({ base: null, level: 'warn' }),
    enqueue: async () => {
      throw new Error('Laying the demo fleet leaves no job behind');
    },
  };
  try {
    await checkKeys(db, services.vault);
    const people = await layDemo(services, keepSignIns);
    if (people) process.stdout.write('The demo fleet is laid: 46 vessels.\n');
  } finally {
    await closeScorer();
    await db.close();
  }
}

/** For this computer's user only: whoever reads it can sign in to the demo. */
async function keepSignIns(people: readonly DemoSignIn[]): Promise<void> {
  const dir = process.env.DATA_DIR ?? '.data';
  await mkdir(dir, { recursive: true });
  const file = join(dir, 'demo.json');
  await writeFile(`${file}.new`, `${JSON.stringify({ people }, null, 2)}\n`, { mode: 0o600 });
  await rename(`${file}.new`, file);
}

try {
  await seed();
} catch (error) {
  process.stderr.write(`${error instanceof Error ? error.message : 'The demo fleet could not be laid.'}\n`);
  process.exitCode = 1;
}
