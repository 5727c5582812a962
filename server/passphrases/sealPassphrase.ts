import { randomUUID } from 'node:crypto';
import type { Tx } from '../db/connection.ts';
import type { Place } from '../db/vault.ts';
import { AppError } from '../errors.ts';
import type { Services } from '../services.ts';

export interface NewPassphrase {
  readonly vesselId: string;
  readonly networkId: string;
  readonly passphrase: string;
  readonly origin: 'generated' | 'typed';
  /** log2 of the equally likely draws, or of the guesses needed. */
  readonly bits: number;
  readonly now: Date;
}

export const secretPlace = (row: {
  id: string;
  vesselId: string;
  networkId: string;
  generation: number;
}): Place => ({
  table: 'passphrase_secrets',
  column: 'sealed',
  rowId: row.id,
  vesselId: row.vesselId,
  networkId: row.networkId,
  generation: row.generation,
});

/**
 * Stores a passphrase sealed, as the network's next generation; it is not live yet. Throws `reused` when the
 * vessel had the same passphrase before, found by its keyed fingerprint without opening anything.
 */
export async function sealPassphrase(services: Services, tx: Tx, given: NewPassphrase): Promise<string> {
  const { db, vault } = services;
  const fingerprint = vault.fingerprint(given.vesselId, given.passphrase);
  const seen = await db.row(
    tx,
    'SELECT 1 FROM passphrase_secrets WHERE vessel_id = $vessel AND fingerprint = $fingerprint',
    { vessel: given.vesselId, fingerprint },
  );
  if (seen) {
    throw new AppError(
      'reused',
      'This passphrase was used on this vessel before, so people who left may know it. Choose another.',
      {
        errors: { passphrase: ['Used on this vessel before. Choose another, or let Quayword make one.'] },
      },
    );
  }
  const [counted] = await db.run<{ last_generation: number }>(
    tx,
    'UPDATE networks SET last_generation = last_generation + 1 WHERE id = $network AND vessel_id = $vessel RETURNING last_generation',
    { network: given.networkId, vessel: given.vesselId },
  );
  if (!counted) throw new AppError('not_found', 'There is no such network.');
  const id = randomUUID();
  const generation = counted.last_generation;
  await db.run(
    tx,
    `INSERT INTO passphrases(id, vessel_id, network_id, generation, origin, bits, created_at)
     VALUES ($id, $vessel, $network, $generation, $origin, $bits, $now)`,
    {
      id,
      vessel: given.vesselId,
      network: given.networkId,
      generation,
      origin: given.origin,
      bits: given.bits,
      now: given.now,
    },
  );
  const { keyId, sealed } = vault.seal(
    secretPlace({ id, vesselId: given.vesselId, networkId: given.networkId, generation }),
    given.passphrase,
  );
  await db.run(
    tx,
    `INSERT INTO passphrase_secrets(passphrase_id, vessel_id, key_id, sealed, fingerprint)
     VALUES ($id, $vessel, $keyId, $sealed, $fingerprint)`,
    { id, vessel: given.vesselId, keyId, sealed, fingerprint },
  );
  return id;
}

/** A passphrase to be stored whose id, fingerprint and, under the lock on its network, generation are known already. */
export interface NumberedPassphrase extends NewPassphrase {
  readonly id: string;
  readonly generation: number;
  readonly fingerprint: Buffer;
}

/** Which of these their vessels had before, by keyed fingerprint, which covers the vessel: their places in the list. */
export async function findReused(
  services: Services,
  tx: Tx,
  given: readonly Pick<NumberedPassphrase, 'vesselId' | 'fingerprint'>[],
): Promise<Set<number>> {
  const rows = await services.db.rows<{ place: string }>(
    tx,
    `SELECT g.place - 1 AS place FROM unnest($vessels::uuid[], $fingerprints::bytea[])
       WITH ORDINALITY AS g(vessel_id, fingerprint, place)
     JOIN passphrase_secrets s ON s.vessel_id = g.vessel_id AND s.fingerprint = g.fingerprint`,
    {
      vessels: given.map(({ vesselId }) => vesselId),
      fingerprints: given.map(({ fingerprint }) => fingerprint),
    },
  );
  return new Set(rows.map(({ place }) => Number(place)));
}

/**
 * Stores many passphrases sealed, in one statement. The caller holds the locks on their networks, counts their
 * generations up, and has made sure none was used before: a reused one fails the statement by the unique fingerprint.
 */
export async function sealPassphrases(
  services: Services,
  tx: Tx,
  given: readonly NumberedPassphrase[],
): Promise<void> {
  const { db, vault } = services;
  const rows = given.map((one) => {
    const { keyId, sealed } = vault.seal(secretPlace(one), one.passphrase);
    return {
      id: one.id,
      vessel_id: one.vesselId,
      network_id: one.networkId,
      generation: one.generation,
      origin: one.origin,
      bits: one.bits,
      created_at: one.now,
      key_id: keyId,
      sealed: sealed.toString('hex'),
      fingerprint: one.fingerprint.toString('hex'),
    };
  });
  await db.run(
    tx,
    `WITH given AS (
       SELECT * FROM jsonb_to_recordset($rows::jsonb) AS g(id uuid, vessel_id uuid, network_id uuid, generation integer,
         origin text, bits numeric, created_at timestamptz, key_id text, sealed text, fingerprint text)),
     facts AS (
       INSERT INTO passphrases(id, vessel_id, network_id, generation, origin, bits, created_at)
       SELECT id, vessel_id, network_id, generation, origin, bits, created_at FROM given)
     INSERT INTO passphrase_secrets(passphrase_id, vessel_id, key_id, sealed, fingerprint)
     SELECT id, vessel_id, key_id, decode(sealed, 'hex'), decode(fingerprint, 'hex') FROM given`,
    { rows: JSON.stringify(rows) },
  );
}

/** Opens a passphrase. Callers are the few deliberate ways out, and each writes the log line first. */
export async function openPassphrase(services: Services, tx: Tx, passphraseId: string): Promise<string> {
  const row = await services.db.row<{
    id: string;
    vessel_id: string;
    network_id: string;
    generation: number;
    key_id: string;
    sealed: Buffer | null;
  }>(
    tx,
    `SELECT p.id, p.vessel_id, p.network_id, p.generation, s.key_id, s.sealed
     FROM passphrases p JOIN passphrase_secrets s ON s.passphrase_id = p.id WHERE p.id = $id`,
    { id: passphraseId },
  );
  if (!row) throw new AppError('not_found', 'There is no such passphrase.');
  if (!row.sealed) throw new AppError('gone', 'That passphrase was retired and is no longer kept.');
  return services.vault.open(
    secretPlace({
      id: row.id,
      vesselId: row.vessel_id,
      networkId: row.network_id,
      generation: row.generation,
    }),
    { keyId: row.key_id, sealed: row.sealed },
  );
}
