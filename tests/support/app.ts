import { randomBytes, randomUUID } from 'node:crypto';
import { Writable } from 'node:stream';
import type { Express } from 'express';
import { pino } from 'pino';
import { afterAll, afterEach, beforeAll } from 'vitest';
import { createApp } from '../../server/app.ts';
import { readConfig } from '../../server/config.ts';
import { Database } from '../../server/db/connection.ts';
import { checkKeys } from '../../server/db/keyCheck.ts';
import { Vault } from '../../server/db/vault.ts';
import { type Queue, startQueue } from '../../server/jobs/queue.ts';
import type { Clock, Services } from '../../server/services.ts';
import { testDatabase } from './database.ts';
import { dumpHoldsNoSecret, oracles, type Recorded } from './oracles.ts';

/** A clock that stands still until a test moves it, also backwards. */
export class TestClock implements Clock {
  constructor(private at = new Date('2026-06-14T12:12:00Z')) {}
  now(): Date {
    return new Date(this.at);
  }
  set(at: Date | string): void {
    this.at = new Date(at);
  }
  advance(ms: number): void {
    this.at = new Date(this.at.getTime() + ms);
  }
}

export interface TestApp {
  readonly app: Express;
  readonly services: Services;
  readonly clock: TestClock;
  readonly queue: Queue;
  readonly ownerUrl: string;
  readonly appUrl: string;
  /** Everything the server logged, as text. */
  readonly logged: () => string;
  readonly origin: string;
  /** Every answer the server gave to a test's clients. */
  readonly recorded: Recorded[];
  /** Ids of every session a client of this file used; nothing but a cookie may hold one. */
  readonly sessionIds: Set<string>;
  /** Vessel → the log's head when it was last found whole. */
  readonly headsSeen: Map<string, string>;
  /** True where the file's tests change logs behind the server's back, so that they cannot hold afterwards. */
  readonly spoilsLogs: boolean;
}

export const testEnv = (appUrl: string): NodeJS.ProcessEnv => ({
  NODE_ENV: 'test',
  PORT: '0',
  PUBLIC_URL: 'https://quayword.test',
  DATABASE_APP_URL: appUrl,
  SESSION_KEYS: `s1:${randomBytes(32).toString('base64')}`,
  VAULT_KEYS: `v1:${randomBytes(32).toString('base64')}`,
  FINGERPRINT_KEY: randomBytes(32).toString('base64'),
  PASSWORD_PEPPER: randomBytes(32).toString('base64'),
  LOG_SIGNING_SEED: randomBytes(32).toString('base64'),
});

/** The real application on a real database of its own, for one test file. */
export function useApp(options: { spoilsLogs?: boolean } = {}): TestApp {
  const holder: { app?: TestApp } = {};
  let lines = '';
  const database = testDatabase();
  beforeAll(async () => {
    const { appUrl, ownerUrl } = database;
    const config = readConfig(testEnv(appUrl));
    const clock = new TestClock();
    const sink = new Writable({
      write(chunk, _encoding, done) {
        lines += String(chunk);
        done();
      },
    });
    const log = pino({ base: null, level: 'debug' }, sink);
    const db = new Database(appUrl, { poolMax: 8, refuseNested: true });
    const vault = new Vault(config.vaultKeys, config.fingerprintKey);
    await checkKeys(db, vault);
    const queue = await startQueue(db, appUrl, () => undefined, { pollSeconds: 0.5 });
    const services: Services = { config, db, vault, clock, log, enqueue: queue.enqueue };
    holder.app = {
      app: createApp(services),
      services,
      clock,
      queue,
      ownerUrl,
      appUrl,
      logged: () => lines,
      origin: config.publicUrl,
      recorded: [],
      sessionIds: new Set(),
      headsSeen: new Map(),
      spoilsLogs: options.spoilsLogs ?? false,
    };
  });
  afterEach(async () => {
    if (!holder.app) return;
    try {
      await oracles(holder.app, holder.app.recorded);
    } finally {
      // What one test did is not held against the next.
      holder.app.recorded.length = 0;
    }
  });
  afterAll(async () => {
    if (holder.app) await dumpHoldsNoSecret(holder.app);
    await holder.app?.queue.stop();
    await holder.app?.services.db.close();
  });
  return new Proxy({} as TestApp, {
    get: (_target, name) => {
      if (!holder.app) throw new Error('The application starts in beforeAll; use it inside a test');
      return holder.app[name as keyof TestApp];
    },
  });
}

export const uuid = (): string => randomUUID();
