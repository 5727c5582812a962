import type PgBoss from 'pg-boss';

/** The queues, made by the migration. Retries are the queue's; each job re-checks under lock. */
export const QUEUES: readonly PgBoss.Queue[] = [
  {
    name: 'mail.send',
    policy: 'standard',
    retryLimit: 12,
    retryDelay: 15,
    retryBackoff: true,
    expireInSeconds: 120,
  },
  {
    name: 'rehearsal.carryOut',
    policy: 'standard',
    retryLimit: 8,
    retryDelay: 5,
    retryBackoff: true,
    expireInSeconds: 120,
  },
];
export type QueueName = 'mail.send' | 'rehearsal.carryOut';
