import type PgBoss from 'pg-boss';
import type { Logger } from 'pino';
import type { Config } from './config.ts';
import type { Database, Tx } from './db/connection.ts';
import type { Vault } from './db/vault.ts';
import type { QueueName } from './jobs/queues.ts';

/** Where instants come from. Tests own theirs. */
export interface Clock {
  now(): Date;
}

export const systemClock: Clock = { now: () => new Date() };

/** Puts a job on the queue inside the caller's transaction, so it exists only if the change does. */
export type Enqueue = (tx: Tx, queue: QueueName, data: object, options?: PgBoss.SendOptions) => Promise<void>;

/** What every verb may use; made once at start. */
export interface Services {
  readonly config: Config;
  readonly db: Database;
  readonly vault: Vault;
  readonly clock: Clock;
  readonly log: Logger;
  readonly enqueue: Enqueue;
}
