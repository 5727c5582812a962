import { Writable } from 'node:stream';
import { pino } from 'pino';
import type { Browser } from 'playwright-core';
import { afterAll, beforeAll } from 'vitest';
import { type DemoSignIn, layDemo } from '../../server/seeders/layDemo.ts';
import type { Running } from '../../server/start.ts';
import { testEnv } from '../support/app.ts';
import { launchBrowser } from '../support/browser.ts';
import { testDatabase } from '../support/database.ts';
import { serve } from '../support/server.ts';

export interface Demo {
  readonly running: Running & { origin: string };
  readonly browser: Browser;
  readonly ownerUrl: string;
  /** Somebody of the demo by role, on Tamarisk unless said. */
  person(role: string, vessel?: string): DemoSignIn;
  /** Everything the server logged. */
  logged(): string;
}

/** The demo fleet on a database of its own, the whole server on loopback, and a browser; for one test file. */
export function useDemo(): Demo {
  const database = testDatabase();
  const held: { running?: Running & { origin: string }; browser?: Browser } = {};
  let people: readonly DemoSignIn[] = [];
  let lines = '';
  beforeAll(async () => {
    const sink = new Writable({
      write(chunk, _encoding, done) {
        lines += String(chunk);
        done();
      },
    });
    const env = { ...testEnv(database.appUrl), DEMO: '1' };
    held.running = await serve(env, { log: pino({ base: null }, sink) });
    await layDemo(held.running.services, async (given) => {
      people = given;
    });
    held.browser = await launchBrowser();
  }, 120_000);
  afterAll(async () => {
    await held.browser?.close();
    await held.running?.stop();
  });
  const need = <T>(value: T | undefined): T => {
    if (value === undefined) throw new Error('The demo starts in beforeAll; use it inside a test');
    return value;
  };
  return {
    get running() {
      return need(held.running);
    },
    get browser() {
      return need(held.browser);
    },
    get ownerUrl() {
      return database.ownerUrl;
    },
    person: (role, vessel = 'Tamarisk') =>
      need(people.find((one) => one.role === role && (role.startsWith('Dealer') || one.vessel === vessel))),
    logged: () => lines,
  };
}
