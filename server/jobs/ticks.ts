import { schedule } from 'node-cron';
import { sweepAccounts } from '../auth/sweepAccounts.ts';
import { hearRehearsals } from '../delivery/hear.ts';
import { checkpointLogs } from '../handovers/checkpoint.ts';
import { mailTransport, sweepMail } from '../mail/sendMail.ts';
import { purgeRetired } from '../rotations/purge.ts';
import { sweep } from '../rotations/sweep.ts';
import type { Services } from '../services.ts';
import { endVisits } from '../voyages/endVisits.ts';
import { eraseGuests } from '../voyages/eraseGuests.ts';

/** What happens on the clock, by name; each finds work and does it once even on several servers. */
const TICKS: Record<string, { cron: string; run: (services: Services) => Promise<unknown> }> = {
  rotations: { cron: '*/15 * * * * *', run: sweep },
  mail: { cron: '*/30 * * * * *', run: (services) => sweepMail(services, mailTransport(services)) },
  boats: { cron: '40 * * * * *', run: hearRehearsals },
  visits: { cron: '20 * * * * *', run: endVisits },
  checkpoints: { cron: '3 * * * *', run: (services) => checkpointLogs(services) },
  disclosures: { cron: '5,20,35,50 * * * * *', run: (services) => checkpointLogs(services, 'disclosing') },
  retention: { cron: '17 * * * *', run: eraseGuests },
  accounts: { cron: '23 * * * *', run: sweepAccounts },
  purge: { cron: '7 * * * *', run: purgeRetired },
};

export interface Ticks {
  stop(): Promise<void>;
}

/** Runs every tick once now (work that came due while the server was down), then on its schedule. */
export function startTicks(services: Services): Ticks {
  const running = new Set<Promise<void>>();
  const run = (name: string, work: (services: Services) => Promise<unknown>) => {
    const one: Promise<void> = work(services).then(
      () => undefined,
      (error: unknown) =>
        services.log.error(
          { tick: name, error: error instanceof Error ? error.name : 'unknown' },
          'tick failed',
        ),
    );
    running.add(one);
    void one.finally(() => running.delete(one));
  };
  const tasks = Object.entries(TICKS).map(([name, tick]) => {
    run(name, tick.run);
    return schedule(tick.cron, () => run(name, tick.run), { name, noOverlap: true });
  });
  return {
    stop: async () => {
      for (const task of tasks) await task.destroy();
      await Promise.all(running);
    },
  };
}
