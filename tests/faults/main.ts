import { randomBytes } from 'node:crypto';
import { pino } from 'pino';
import { readConfig } from '../../server/config.ts';
import { Database } from '../../server/db/connection.ts';
import { checkKeys } from '../../server/db/keyCheck.ts';
import { migrate } from '../../server/db/migrate.ts';
import { Vault } from '../../server/db/vault.ts';
import type { Services } from '../../server/services.ts';
import { scratchDatabase } from '../support/scratchDatabase.ts';
import { tryFault, tryPurgeFault } from '../support/seaTrial.ts';

/**
 * `npm run faults`: ends a server by SIGKILL at each named step of a change, once early and once later, lets
 * another take over, and compares log, passphrases and access points. A step that is never reached counts as
 * an error, so that none is forgotten when the code changes.
 */
const NETWORKS = 8;
/** Claim, generate, store with log, commit answered, hand-out commit, begun, set, observed and in force, told, forgotten. */
const POINTS = [
  'S1',
  'S2',
  'S3',
  'S4',
  'S6',
  'S7',
  'S7:3',
  'S8',
  'S8:5',
  'S9',
  'S9:2',
  'S9:9',
  'S10',
  'S10:6',
  'S12',
];

const key = () => randomBytes(32).toString('base64');
const database = await scratchDatabase('faults');
const failures: string[] = [];
let lost = 0;
let lockedOut = 0;
let tried = 0;
try {
  await migrate(database);
  const config = readConfig({
    NODE_ENV: 'test',
    PORT: '0',
    DATABASE_APP_URL: database.appUrl,
    SESSION_KEYS: `s1:${key()}`,
    VAULT_KEYS: `v1:${key()}`,
    FINGERPRINT_KEY: key(),
    PASSWORD_PEPPER: key(),
    LOG_SIGNING_SEED: key(),
  });
  const db = new Database(config.databaseUrl, { poolMax: 4 });
  const vault = new Vault(config.vaultKeys, config.fingerprintKey);
  const services: Services = {
    config,
    db,
    vault,
    clock: { now: () => new Date() },
    log: pino({ level: 'silent' }),
    enqueue: async () => undefined,
  };
  try {
    await checkKeys(db, vault);
    for (const point of POINTS) {
      const verdict = await (point === 'S12'
        ? tryPurgeFault(services, NETWORKS)
        : tryFault(services, point, NETWORKS));
      tried += 1;
      lost += verdict.lost.length;
      lockedOut += verdict.lockedOut.length;
      if (!verdict.fired) failures.push(`${point} was never reached`);
      failures.push(...verdict.lost, ...verdict.lockedOut);
      const said = verdict.lost.length + verdict.lockedOut.length === 0 ? 'made up for' : 'NOT made up for';
      console.log(`${point}: ${verdict.fired ? 'ended there' : 'never reached'}, ${said}`);
    }
  } finally {
    await db.close();
  }
} finally {
  await database.drop();
}
for (const failure of failures) console.log(failure);
if (failures.length > 0) process.exitCode = 1;
console.log(`${tried} faults tried, ${lost} lost, ${lockedOut} locked out`);
