import type { Database, Tx } from './connection.ts';
import { type Vault, VaultError } from './vault.ts';

const PLACE = { table: 'installation', column: 'key_checks', rowId: 'only' };
const TEXT = 'Quayword key check';
/** Where the fingerprint key's check lies among those of the vault; no key may be called so. */
const FINGERPRINT = '#fingerprint';

/**
 * Refuses to start with keys other than those the rows were sealed with: a known text sealed by each key lies
 * in the database and must open, and so must a fingerprint of it, without which reuse would go unseen. A key that
 * rows still need may not be missing. The first start with a new key writes its check. Throws {@link VaultError}
 * with a sentence that says which setting is wrong; nothing is written then.
 */
export async function checkKeys(db: Database, vault: Vault): Promise<void> {
  await db.transaction({ kind: 'system' }, async (tx) => {
    const row = await db.row<{ key_checks: Record<string, string> }>(
      tx,
      'SELECT key_checks FROM installation FOR UPDATE',
    );
    if (!row) throw new Error('The database is not set up; run the migrations');
    const { [FINGERPRINT]: fingerprint, ...known } = row.key_checks;
    for (const [keyId, sealed] of Object.entries(known)) {
      if (vault.holds(keyId)) mustOpen(vault, keyId, sealed);
      else if (await stillNeeded(db, tx, keyId))
        throw new VaultError(
          `VAULT_KEYS lacks the key "${keyId}", and rows of this database are still sealed with it. Put it back after the current one.`,
        );
    }
    const ours = vault.fingerprint(PLACE.table, TEXT).toString('base64');
    if (fingerprint !== undefined && fingerprint !== ours)
      throw new VaultError(
        'FINGERPRINT_KEY is not the one this database was used with; a passphrase used before would not be recognised.',
      );
    const keyId = vault.currentKeyId;
    const missing = {
      ...(known[keyId] === undefined
        ? { [keyId]: vault.seal(PLACE, TEXT).sealed.toString('base64') }
        : undefined),
      ...(fingerprint === undefined ? { [FINGERPRINT]: ours } : undefined),
    };
    if (Object.keys(missing).length > 0)
      await db.run(tx, 'UPDATE installation SET key_checks = key_checks || $missing::jsonb', {
        missing: JSON.stringify(missing),
      });
  });
}

function mustOpen(vault: Vault, keyId: string, sealed: string): void {
  try {
    vault.open(PLACE, { keyId, sealed: Buffer.from(sealed, 'base64') });
  } catch (cause) {
    throw new VaultError(
      `The key "${keyId}" of VAULT_KEYS is not the one of that name this database was sealed with.`,
      { cause },
    );
  }
}

async function stillNeeded(db: Database, tx: Tx, keyId: string): Promise<boolean> {
  const row = await db.row<{ needed: boolean }>(
    tx,
    `SELECT EXISTS (SELECT 1 FROM passphrase_secrets WHERE key_id = $keyId AND sealed IS NOT NULL)
         OR EXISTS (SELECT 1 FROM people WHERE totp_key_id = $keyId)
         OR EXISTS (SELECT 1 FROM mail_outbox WHERE key_id = $keyId AND sealed IS NOT NULL) AS needed`,
    { keyId },
  );
  return row?.needed ?? false;
}
