import { createServer } from 'node:http';
import { Misconfigured, readConfig } from './config.ts';
import { VaultError } from './db/vault.ts';
import { startServer } from './start.ts';

try {
  const running = await startServer(readConfig(process.env), { createServer });
  let stopping = false;
  const stop = async () => {
    if (stopping) return;
    stopping = true;
    await running.stop();
    process.exit(0);
  };
  process.on('SIGINT', stop);
  process.on('SIGTERM', stop);
} catch (error) {
  if (error instanceof Misconfigured || error instanceof VaultError) {
    process.stderr.write(`${error.message}\n`);
  } else {
    const reason =
      error instanceof Error ? `${error.name}: ${'code' in error ? error.code : error.message}` : 'unknown';
    process.stderr.write(`The server could not start (${reason}).\n`);
  }
  process.exit(1);
}
