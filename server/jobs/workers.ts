import { carryOut } from '../delivery/rehearsal.ts';
import { resumeDeliveries } from '../rotations/sweep.ts';
import type { Services } from '../services.ts';
import type { Queue } from './queue.ts';

/** What each queue's jobs do. Every job looks again under lock before it acts. */
export async function startWorkers(services: Services, queue: Queue): Promise<void> {
  await queue.work('rehearsal.carryOut', (data) => carryOut(services, data));
  await resumeDeliveries(services);
}
