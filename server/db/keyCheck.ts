import type { Database } from './connection.ts';
import { type Vault, VaultError } from './vault.ts';

const PLACE = { table: 'installation', column: 'key_checks', rowId: 'only' };
const TEXT = 'Quayword key check';

/**
 * Refuses to start with a key other than the one the rows were sealed with: a known text sealed by each key
 * lies in the database and must open. The first start with a new key writes its check.
 */
export async function checkKeys(db: Database, vault: Vault): Promise<void> {
  await db.transaction({ kind: 'none' }, async (tx) => {
    const row = await db.row<{ key_checks: Record<string, string> }>(
      tx,
      'SELECT key_checks FROM installation FOR UPDATE',
    );
    if (!row) throw new Error('The database is not set up; run the migrations');
    const keyId = vault.currentKeyId;
    const known = row.key_checks[keyId];
    if (known === undefined) {
      const { sealed } = vault.seal(PLACE, TEXT);
      await db.run(
        tx,
        'UPDATE installation SET key_checks = key_checks || jsonb_build_object($keyId::text, $sealed::text)',
        { keyId, sealed: sealed.toString('base64') },
      );
    } else if (vault.open(PLACE, { keyId, sealed: Buffer.from(known, 'base64') }) !== TEXT) {
      throw new VaultError('VAULT_KEYS is not the key this database was sealed with');
    }
  });
}
