import { describe, expect, test } from 'vitest';
import { useApp } from '../../support/app.ts';
import {
  childEnv,
  countIn,
  judge,
  layDueChanges,
  startServerProcess,
  tryFaults,
  until,
} from '../../support/seaTrial.ts';

const app = useApp();

describe('several servers, and servers that die', () => {
  test('two servers, 200 changes due: each happens exactly once (R51)', async () => {
    app.clock.set(new Date());
    // Laid first, so that both find all of it at their start and at the same time.
    const ids = await layDueChanges(app.services, 200);
    const env = childEnv(app.services.config);
    const servers = [startServerProcess(env), startServerProcess(env)];
    try {
      await until(120, 'all 200 changes are in force', async () => {
        return (await countIn(app.services, ids, 'live')) === 200 || servers.some((one) => one.isOver());
      });
    } finally {
      for (const server of servers) server.process.kill('SIGTERM');
    }
    expect(await Promise.all(servers.map((server) => server.ended))).toEqual(['0', '0']);
    expect(await judge(app.services, ids)).toEqual({ lost: [], lockedOut: [] });
  }, 180_000);

  test('kill -9 in the middle, from outside: nothing is lost, nothing happens twice (R52)', async () => {
    app.clock.set(new Date());
    const ids = await layDueChanges(app.services, 24);
    const live = () => countIn(app.services, ids, 'live');
    const env = childEnv(app.services.config);
    const first = startServerProcess(env);
    await until(60, 'some changes are in force and some are not', async () => (await live()) >= 2);
    first.process.kill('SIGKILL');
    expect(await first.ended).toBe('SIGKILL');
    expect(await live()).toBeLessThan(24);
    const second = startServerProcess(env);
    // Recovery is to take at most a minute (R52).
    await until(60, 'the rest is in force', async () => (await live()) === 24);
    second.process.kill('SIGTERM');
    expect(await second.ended).toBe('0');
    expect(await judge(app.services, ids)).toEqual({ lost: [], lockedOut: [] });
  }, 180_000);

  test('servers that die one after the other, each at another step, are made up for by the last (R52)', async () => {
    app.clock.set(new Date());
    expect(await tryFaults(app.services, ['S1', 'S3', 'S6', 'S9:2'], 8)).toEqual({
      lost: [],
      lockedOut: [],
      neverReached: [],
    });
  }, 240_000);
});
