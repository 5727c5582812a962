import PgBoss from 'pg-boss';
import { QueryTypes } from 'sequelize';
import type { Database } from '../db/connection.ts';
import type { Enqueue } from '../services.ts';
import type { QueueName } from './queues.ts';

export interface Queue {
  readonly enqueue: Enqueue;
  /** Runs `work` for each job of the queue; a thrown error is retried by the queue's own rule. */
  work(
    name: QueueName,
    work: (data: unknown, jobId: string) => Promise<void>,
    options?: { readonly batchSize?: number },
  ): Promise<void>;
  stop(): Promise<void>;
}

/** The Postgres-backed queue. Jobs are written in the transaction of the change that needs them. */
export async function startQueue(
  db: Database,
  url: string,
  onError: (error: Error) => void,
  options: { pollSeconds?: number } = {},
): Promise<Queue> {
  const boss = new PgBoss({
    connectionString: url,
    schema: 'pgboss',
    migrate: false,
    max: 4,
    application_name: 'quayword-queue',
    maintenanceIntervalSeconds: 60,
    schedule: false,
  });
  boss.on('error', onError);
  await boss.start();
  return {
    enqueue: async (tx, queue, data, sendOptions = {}) => {
      await boss.send(queue, data, {
        ...sendOptions,
        db: {
          executeSql: async (sql: string, values: unknown[]) => {
            const rows = await db.sequelize.query(sql, {
              // The queue leaves out what is not set; here every place must hold something.
              bind: values.map((value) => value ?? null),
              transaction: tx,
              type: QueryTypes.SELECT,
            });
            return { rows };
          },
        },
      });
    },
    work: async (name, work, { batchSize = 5 } = {}) => {
      await boss.work(name, { batchSize, pollingIntervalSeconds: options.pollSeconds ?? 2 }, async (jobs) => {
        for (const job of jobs) await work(job.data, job.id);
      });
    },
    stop: () => boss.stop({ graceful: true, timeout: 10_000, wait: true }),
  };
}
