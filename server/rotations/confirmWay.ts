import type { Way } from '../../shared/rules/rotation.ts';
import type { Tx } from '../db/connection.ts';
import type { Services } from '../services.ts';
import type { By } from './by.ts';
import { lockRotation } from './lockRotation.ts';
import { takeStep } from './takeStep.ts';

/**
 * Records that the passphrase of an open change can be learnt aboard in this way, e.g. `card` when one carrying
 * it was printed and handed over. Answers whether there was such a change; a passphrase in force needs no way.
 */
export async function confirmWay(
  services: Services,
  tx: Tx,
  vesselId: string,
  passphraseId: string,
  way: Way,
  by: By,
): Promise<boolean> {
  const row = await services.db.row<{ id: string }>(
    tx,
    `SELECT id FROM rotations WHERE vessel_id = $vessel AND to_passphrase_id = $passphrase
       AND state IN ('staged','handed_out','applying','unknown','needs_somebody')`,
    { vessel: vesselId, passphrase: passphraseId },
  );
  if (!row) return false;
  const known = await lockRotation(services, tx, vesselId, row.id);
  await takeStep(services, tx, known, { kind: 'disclose', way }, by);
  return true;
}
