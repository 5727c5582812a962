import { pino } from 'pino';
import { email } from '../../shared/api/auth.ts';
import { firstDealer } from '../auth/firstDealer.ts';
import { Misconfigured, readConfig } from '../config.ts';
import { Database } from '../db/connection.ts';
import { Vault } from '../db/vault.ts';
import { AppError } from '../errors.ts';
import { type Services, systemClock } from '../services.ts';

const [dealer = '', name = '', address = ''] = process.argv.slice(2);

try {
  const checked = email.safeParse(address);
  if (!dealer.trim() || !name.trim() || !checked.success) {
    throw new Misconfigured([
      'usage: npm run first:dealer -- "Dealer" "Person of the service desk" name@dealer.example',
    ]);
  }
  const config = readConfig(process.env);
  const db = new Database(config.databaseUrl, { poolMax: 1 });
  const services: Services = {
    config,
    db,
    vault: new Vault(config.vaultKeys, config.fingerprintKey),
    clock: systemClock,
    log: pino({ level: 'silent' }),
    enqueue: async () => undefined,
  };
  try {
    const token = await db.transaction({ kind: 'none' }, (tx) =>
      firstDealer(services, tx, { dealer: dealer.trim(), name: name.trim(), email: checked.data }),
    );
    process.stdout.write(
      `${dealer} is made. Within 15 minutes, open this link once to set the password of ${checked.data}:\n  ${config.publicUrl}/reset/new#${token}\n`,
    );
  } finally {
    await db.close();
  }
} catch (error) {
  const known = error instanceof Misconfigured || error instanceof AppError;
  process.stderr.write(`${known ? error.message : 'The dealer could not be made.'}\n`);
  process.exitCode = 1;
}
