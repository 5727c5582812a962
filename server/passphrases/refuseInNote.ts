import type { Tx } from '../db/connection.ts';
import { invalid } from '../errors.ts';
import type { Services } from '../services.ts';
import { openPassphrase } from './sealPassphrase.ts';

/** Letters and figures only, so that a passphrase is known however it is spaced or hyphenated. */
const bare = (text: string) => text.toLowerCase().replace(/[^\p{L}\p{N}]/gu, '');

/**
 * Refuses a note that holds a passphrase of the network that may work now: notes are stored and shown as they are.
 * Nothing of it is kept or repeated.
 */
export async function refuseInNote(
  services: Services,
  tx: Tx,
  networkId: string,
  note: string | null | undefined,
  field = 'note',
): Promise<void> {
  if (!note) return;
  const kept = await services.db.rows<{ id: string }>(
    tx,
    `SELECT p.id FROM passphrases p JOIN passphrase_secrets s ON s.passphrase_id = p.id
     WHERE p.network_id = $network AND p.retired_at IS NULL AND s.sealed IS NOT NULL`,
    { network: networkId },
  );
  for (const { id } of kept) {
    const passphrase = await openPassphrase(services, tx, id);
    if (note.includes(passphrase) || bare(note).includes(bare(passphrase))) {
      throw invalid({
        [field]: ['Leave the passphrase out: notes are shown to others. Write only what happened.'],
      });
    }
  }
}
