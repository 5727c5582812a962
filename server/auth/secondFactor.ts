import { createHmac, randomBytes, randomUUID } from 'node:crypto';
import { Secret, TOTP } from 'otpauth';
import type { Tx } from '../db/connection.ts';
import { AppError, invalid } from '../errors.ts';
import { sha256 } from '../http/session.ts';
import type { Services } from '../services.ts';

/** RFC 6238 with its defaults: SHA-1, 30 s steps, six digits. */
const STEP_S = 30;
const DIGITS = 6;
const SECRET_OCTETS = 20;
const RECOVERY_CODES = 10;
/** 112 bits and more: 14 octets. */
const RECOVERY_OCTETS = 14;

const place = (personId: string) => ({ table: 'people', column: 'totp_secret', rowId: personId });

/** The step of an instant: whole 30 s since 1970 (RFC 6238 section 4.2). */
export const stepOf = (at: Date): number => Math.floor(at.getTime() / 1000 / STEP_S);

/** The code of a step for a secret in base32. */
export function codeOf(secret: string, step: number): string {
  return new TOTP({ secret: Secret.fromBase32(secret), period: STEP_S, digits: DIGITS }).generate({
    timestamp: step * STEP_S * 1000,
  });
}

/** Begins enrolment: a new secret, sealed, which counts only once a code of it has been given. */
export async function beginEnrolment(services: Services, tx: Tx, person: { id: string; email: string }) {
  const row = await services.db.row<{ totp_enrolled_at: Date | null }>(
    tx,
    'SELECT totp_enrolled_at FROM people WHERE id = $id FOR UPDATE',
    { id: person.id },
  );
  if (row?.totp_enrolled_at)
    throw new AppError('conflict', 'A second factor is set up already. Take it away first to replace it.');
  const secret = new Secret({ buffer: new Uint8Array(randomBytes(SECRET_OCTETS)).buffer });
  const { keyId, sealed } = services.vault.seal(place(person.id), secret.base32);
  await services.db.run(
    tx,
    'UPDATE people SET totp_secret = $sealed, totp_key_id = $keyId, totp_last_step = 0 WHERE id = $id',
    { id: person.id, sealed, keyId },
  );
  const uri = new TOTP({
    issuer: 'Quayword',
    label: person.email,
    secret,
    period: STEP_S,
    digits: DIGITS,
  }).toString();
  return { secret: secret.base32, uri };
}

/** Ends enrolment with a right code; answers ten recovery codes, stored only as hashes. */
export async function finishEnrolment(
  services: Services,
  tx: Tx,
  personId: string,
  code: string,
): Promise<string[]> {
  const row = await factorOf(services, tx, personId);
  if (!row?.totp_secret || row.totp_enrolled_at)
    throw new AppError('conflict', 'Begin setting up the second factor first.');
  if (!(await takeCode(services, tx, personId, row, code))) {
    throw invalid({
      code: ['That code did not match. Check the phone’s clock, wait for the next code, and give that one.'],
    });
  }
  await services.db.run(tx, 'UPDATE people SET totp_enrolled_at = $now WHERE id = $id', {
    id: personId,
    now: services.clock.now(),
  });
  return newRecoveryCodes(services, tx, personId);
}

async function newRecoveryCodes(services: Services, tx: Tx, personId: string): Promise<string[]> {
  await services.db.run(tx, 'DELETE FROM recovery_codes WHERE person_id = $id', { id: personId });
  const codes: string[] = [];
  for (let index = 0; index < RECOVERY_CODES; index += 1) {
    const plain =
      randomBytes(RECOVERY_OCTETS)
        .toString('hex')
        .match(/.{1,7}/g)
        ?.join('-') ?? '';
    codes.push(plain);
    await services.db.run(
      tx,
      'INSERT INTO recovery_codes(id, person_id, code_hash) VALUES ($id, $person, $hash)',
      {
        id: randomUUID(),
        person: personId,
        hash: recoveryHash(services, plain),
      },
    );
  }
  return codes;
}

const recoveryHash = (services: Services, code: string): Buffer =>
  createHmac('sha256', services.config.passwordPepper)
    .update(sha256(code.toLowerCase().replace(/[^0-9a-f]/g, '')))
    .digest();

interface Factor {
  totp_secret: Buffer | null;
  totp_key_id: string | null;
  totp_enrolled_at: Date | null;
}

function factorOf(services: Services, tx: Tx, personId: string): Promise<Factor | null> {
  return services.db.row<Factor>(
    tx,
    'SELECT totp_secret, totp_key_id, totp_enrolled_at FROM people WHERE id = $id',
    { id: personId },
  );
}

/**
 * Accepts the code of this step or of the one before (a documented allowance for slow typing), each step once: the
 * last accepted step only grows, in one statement, so twenty tries at one moment let one through.
 */
async function takeCode(
  services: Services,
  tx: Tx,
  personId: string,
  factor: Factor,
  given: string,
): Promise<boolean> {
  if (!factor.totp_secret || !factor.totp_key_id) return false;
  const digits = given.replace(/\s/g, '');
  if (!/^\d{6}$/.test(digits)) return false;
  const secret = services.vault.open(place(personId), {
    keyId: factor.totp_key_id,
    sealed: factor.totp_secret,
  });
  const now = stepOf(services.clock.now());
  const step = [now, now - 1].find((candidate) => codeOf(secret, candidate) === digits);
  if (step === undefined) return false;
  const taken = await services.db.run(
    tx,
    'UPDATE people SET totp_last_step = $step WHERE id = $id AND totp_last_step < $step RETURNING id',
    { id: personId, step },
  );
  return taken.length === 1;
}

async function takeRecoveryCode(
  services: Services,
  tx: Tx,
  personId: string,
  given: string,
): Promise<boolean> {
  const used = await services.db.run(
    tx,
    `UPDATE recovery_codes SET used_at = $now WHERE id IN
       (SELECT id FROM recovery_codes WHERE person_id = $person AND code_hash = $hash AND used_at IS NULL FOR UPDATE SKIP LOCKED) RETURNING id`,
    { person: personId, hash: recoveryHash(services, given), now: services.clock.now() },
  );
  return used.length === 1;
}

/** Whether a code of the app, or a recovery code, was given that had not been used. It is used up by this. */
export async function takeSecondFactor(
  services: Services,
  tx: Tx,
  personId: string,
  given: string,
): Promise<boolean> {
  const factor = await factorOf(services, tx, personId);
  if (!factor?.totp_enrolled_at) return false;
  return (
    (await takeCode(services, tx, personId, factor, given)) ||
    (await takeRecoveryCode(services, tx, personId, given))
  );
}

/** Takes the second factor and its recovery codes away. */
export async function removeSecondFactor(services: Services, tx: Tx, personId: string): Promise<void> {
  await services.db.run(
    tx,
    'UPDATE people SET totp_secret = NULL, totp_key_id = NULL, totp_enrolled_at = NULL WHERE id = $id',
    { id: personId },
  );
  await services.db.run(tx, 'DELETE FROM recovery_codes WHERE person_id = $id', { id: personId });
}
