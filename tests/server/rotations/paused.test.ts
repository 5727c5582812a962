import { expect, test } from 'vitest';
import { useApp } from '../../support/app.ts';
import {
  childEnv,
  countIn,
  judge,
  layDueChanges,
  startServerProcess,
  until,
} from '../../support/seaTrial.ts';

const app = useApp();

test('R51, R52: a server stopped in the middle of its work and woken after another took over adds nothing', async () => {
  app.clock.set(new Date());
  const ids = await layDueChanges(app.services, 40);
  const env = childEnv(app.services.config);
  const live = () => countIn(app.services, ids, 'live');
  const first = startServerProcess(env);
  await until(60, 'some changes are in force and some are not', async () => (await live()) >= 3);
  // Stopped, not ended: its connections stay open and its locks with them.
  first.process.kill('SIGSTOP');
  const left = 40 - (await live());
  expect(left).toBeGreaterThan(0);
  const second = startServerProcess(env);
  try {
    // What the stopped one held is freed when the database ends its idle transaction, after half a minute.
    await until(120, 'the other has all of them in force', async () => (await live()) === 40);
    first.process.kill('SIGCONT');
    // Awake again it looks for work as before: it must find none, and go on serving.
    const more = await layDueChanges(app.services, 4);
    await until(60, 'what comes after is done too', async () => {
      return (await countIn(app.services, more, 'live')) === 4;
    });
    expect(await judge(app.services, [...ids, ...more])).toEqual({ lost: [], lockedOut: [] });
  } finally {
    for (const server of [first, second]) {
      server.process.kill('SIGCONT');
      server.process.kill('SIGTERM');
    }
  }
  expect(await Promise.all([first.ended, second.ended])).toEqual(['0', '0']);
}, 300_000);
