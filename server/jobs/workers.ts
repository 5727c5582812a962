import { z } from 'zod';
import { carryOut } from '../delivery/rehearsal.ts';
import { mailTransport, sendMail } from '../mail/sendMail.ts';
import { resumeDeliveries } from '../rotations/sweep.ts';
import type { Services } from '../services.ts';
import type { Queue } from './queue.ts';

/** What each queue's jobs do. Every job looks again under lock before it acts. */
export async function startWorkers(services: Services, queue: Queue): Promise<void> {
  const transport = mailTransport(services);
  await queue.work('mail.send', async (data) => {
    await sendMail(services, transport, z.object({ id: z.uuid() }).parse(data).id);
  });
  await queue.work('rehearsal.carryOut', (data) => carryOut(services, data), { batchSize: 25 });
  await resumeDeliveries(services);
}
