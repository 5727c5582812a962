import type { Services } from '../services.ts';
import type { Queue } from './queue.ts';

/** What each queue's jobs do. Every job looks again under lock before it acts. */
export async function startWorkers(_services: Services, _queue: Queue): Promise<void> {}
