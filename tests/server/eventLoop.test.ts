import { readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import { useApp } from '../support/app.ts';
import { type Boat, boats } from '../support/boat.ts';
import type { Client } from '../support/client.ts';

const app = useApp();
const world = boats(app);

/** Processor time this thread has had, in milliseconds (Linux, proc(5): schedstat, first figure in nanoseconds). */
const busy = (): number =>
  Number(readFileSync(`/proc/self/task/${process.pid}/schedstat`, 'latin1').split(' ')[0]) / 1e6;

/**
 * How long the event loop's thread works before it looks at its timers again. Counted in its own processor time, so
 * that what else the machine does neither hides nor adds anything.
 */
class Watch {
  readonly turns: number[] = [];
  private last = busy();
  private readonly timer = setInterval(() => this.look(), 10);

  private look(): void {
    const now = busy();
    this.turns.push(now - this.last);
    this.last = now;
  }

  /** 99 of 100 turns took no longer than this, and the longest of all; in milliseconds. */
  end(): { p99: number; longest: number } {
    clearInterval(this.timer);
    this.look();
    const sorted = [...this.turns].sort((a, b) => a - b);
    return { p99: sorted[Math.ceil(sorted.length * 0.99) - 1] ?? 0, longest: sorted.at(-1) ?? 0 };
  }
}

const guestList = (guests: number): string =>
  [
    'Name,Cabin,Language,Under 16,From,Until',
    ...Array.from(
      { length: guests },
      (_guest, index) => `Guest Number ${index},Port VIP,it,no,2026-06-14,2026-06-20`,
    ),
  ].join('\n');

interface Asked {
  readonly client: Client;
  readonly boat: Boat;
}
const WORK: readonly (readonly [string, (asked: Asked) => Promise<unknown>])[] = [
  [
    'forty cards on A4',
    ({ client, boat }) =>
      client
        .post(`${boat.base}/networks/${boat.networks.guest.id}/cards/print`, {
          blanks: 40,
          format: 'wallet-sheet',
        })
        .expect(200),
  ],
  [
    'the strength of the hardest text that is taken',
    ({ client, boat }) =>
      client
        .post(`${boat.base}/networks/${boat.networks.guest.id}/passphrase/check`, {
          passphrase: `${'aAbBcC!1'.repeat(7)}zqzqzqz`,
        })
        .expect(200),
  ],
  [
    'a list of 500 guests',
    ({ client, boat }) => client.post(`${boat.base}/arrivals/preview`, { text: guestList(500) }).expect(200),
  ],
  [
    'twenty wrong sign-ins at one moment',
    ({ client }) =>
      Promise.all(
        Array.from({ length: 20 }, (_try, index) =>
          client.post('/session', { email: `nobody-${index}@crew.example`, password: 'not their password' }),
        ),
      ),
  ],
  ['the arrivals screen', ({ client, boat }) => client.get(`${boat.base}/arrivals`).expect(200)],
];

describe('G6: nothing keeps the others waiting', () => {
  test('the watch sees a thread that is kept busy for 300 ms', async () => {
    const watch = new Watch();
    const until = busy() + 300;
    while (busy() < until) JSON.stringify({ busy: true });
    await new Promise((next) => setTimeout(next, 0));
    expect(watch.end().longest).toBeGreaterThanOrEqual(290);
  });

  test.each(WORK)(
    '%s',
    async (_what, work) => {
      const boat = await world.boat();
      const client = await boat.as('captain');
      // Once before it is measured: compiling is done once in a server's life.
      await work({ client, boat });
      const watch = new Watch();
      for (let time = 0; time < 3; time += 1) await work({ client: await boat.as('captain'), boat });
      const { p99, longest } = watch.end();
      console.info(`event loop: ${_what}: p99 ${p99.toFixed(0)} ms, longest ${longest.toFixed(0)} ms`);
      expect(p99).toBeLessThan(200);
    },
    60_000,
  );
});
