import type { Tx } from '../db/connection.ts';
import type { Services } from '../services.ts';

/**
 * Takes the vessel's log head before anything else of the vessel: every verb that writes does so in this order
 * (log head, networks, rotations), so two of them wait for each other instead of for ever.
 */
export async function lockLog(services: Services, tx: Tx, vesselId: string): Promise<void> {
  await services.db.run(tx, 'SELECT 1 FROM log_heads WHERE vessel_id = $vessel FOR UPDATE', {
    vessel: vesselId,
  });
}
