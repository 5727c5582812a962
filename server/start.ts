import type { createServer as CreateServer, Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import { type Logger, pino } from 'pino';
import { createApp } from './app.ts';
import type { Config } from './config.ts';
import { Database } from './db/connection.ts';
import { checkKeys } from './db/keyCheck.ts';
import { Vault } from './db/vault.ts';
import { type Queue, startQueue } from './jobs/queue.ts';
import { startTicks } from './jobs/ticks.ts';
import { startWorkers } from './jobs/workers.ts';
import { type Clock, type Services, systemClock } from './services.ts';

export interface Running {
  readonly services: Services;
  readonly server: Server;
  readonly port: number;
  stop(): Promise<void>;
}

export interface StartOptions {
  readonly createServer: typeof CreateServer;
  readonly clock?: Clock;
  /** Where lines go; standard output unless said. */
  readonly log?: Logger;
  /** Scheduled work; off where a test calls the sweeps itself. */
  readonly ticks?: boolean;
}

/** How long a log line may wait for others to be written with, in milliseconds. */
const LOG_WAITS_MS = 200;

/** Lines to standard output, written behind the requests and many at a time; at the process's end all that wait. */
function standardLog(): Logger {
  return pino(
    { base: null, redact: { paths: ['*.password', '*.passphrase', '*.token'], censor: '[hidden]' } },
    pino.destination({ dest: 1, sync: false, minLength: 4096, periodicFlush: LOG_WAITS_MS }),
  );
}

/** Connects, checks the keys, serves, and starts the scheduled work. */
export async function startServer(config: Config, options: StartOptions): Promise<Running> {
  const log = options.log ?? standardLog();
  const db = new Database(config.databaseUrl, { idleMs: config.transactionIdleMs });
  const vault = new Vault(config.vaultKeys, config.fingerprintKey);
  let queue: Queue | null = null;
  try {
    await checkKeys(db, vault);
    queue = await startQueue(db, config.databaseUrl, (error) => log.error({ name: error.name }, 'queue'));
  } catch (error) {
    await queue?.stop();
    await db.close();
    throw error;
  }
  const services: Services = {
    config,
    db,
    vault,
    clock: options.clock ?? systemClock,
    log,
    enqueue: queue.enqueue,
  };
  const server = options.createServer(
    { requestTimeout: 30_000, headersTimeout: 15_000 },
    createApp(services),
  );
  await new Promise<void>((resolve, reject) => {
    server.once('error', reject);
    server.listen(config.port, config.host, resolve);
  });
  await startWorkers(services, queue);
  const ticks = options.ticks === false ? null : startTicks(services);
  const port = (server.address() as AddressInfo).port;
  log.info({ port }, 'serving');
  return {
    services,
    server,
    port,
    stop: async () => {
      await ticks?.stop();
      await new Promise<void>((resolve) => {
        server.close(() => resolve());
        server.closeIdleConnections();
        setTimeout(() => server.closeAllConnections(), 3_000).unref();
      });
      await queue.stop();
      await db.close();
    },
  };
}
