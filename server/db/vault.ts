import { createCipheriv, createDecipheriv, createHmac, randomBytes } from 'node:crypto';
import type { KeyRing } from '../config.ts';

/** Where a sealed value belongs. All of it is bound in, so a value moved elsewhere does not open. */
export interface Place {
  readonly table: string;
  readonly column: string;
  readonly rowId: string;
  readonly vesselId?: string;
  readonly networkId?: string;
  readonly generation?: number;
}

export interface Sealed {
  readonly keyId: string;
  /** 12-octet nonce, ciphertext, 16-octet tag. */
  readonly sealed: Buffer;
}

/** A sealed value did not open: changed, moved, or sealed by a key this process does not hold. */
export class VaultError extends Error {}

const NONCE = 12;
const TAG = 16;
/** Nonces asked of the system at once: one call of it costs more than sealing a passphrase. */
const NONCES_AHEAD = 128;

let ahead = Buffer.alloc(0);
/** The next random nonce; each octet of what was drawn ahead is given out once. */
function nextNonce(): Buffer {
  if (ahead.length < NONCE) ahead = randomBytes(NONCE * NONCES_AHEAD);
  const nonce = ahead.subarray(0, NONCE);
  ahead = ahead.subarray(NONCE);
  return nonce;
}

function additionalData(place: Place, keyId: string): Buffer {
  return Buffer.from(
    JSON.stringify([
      place.table,
      place.column,
      place.rowId,
      place.vesselId ?? null,
      place.networkId ?? null,
      place.generation ?? null,
      keyId,
    ]),
  );
}

/** AES-256-GCM (NIST SP 800-38D) with random 96-bit nonces, and keyed fingerprints (HMAC-SHA-256). */
export class Vault {
  constructor(
    private readonly ring: KeyRing,
    private readonly fingerprintKey: Buffer,
  ) {}

  seal(place: Place, plain: string): Sealed {
    const keyId = this.ring.current;
    const key = this.ring.keys.get(keyId);
    if (!key) throw new VaultError('The current key is missing');
    const nonce = nextNonce();
    const cipher = createCipheriv('aes-256-gcm', key.subarray(0, 32), nonce, { authTagLength: TAG });
    cipher.setAAD(additionalData(place, keyId));
    const body = Buffer.concat([cipher.update(plain, 'utf8'), cipher.final()]);
    return { keyId, sealed: Buffer.concat([nonce, body, cipher.getAuthTag()]) };
  }

  /** Throws {@link VaultError} on any change of text, place or key; never a partial result. */
  open(place: Place, { keyId, sealed }: Sealed): string {
    const key = this.ring.keys.get(keyId);
    if (!key || sealed.length < NONCE + TAG) throw new VaultError('A sealed value could not be opened');
    try {
      const decipher = createDecipheriv('aes-256-gcm', key.subarray(0, 32), sealed.subarray(0, NONCE), {
        authTagLength: TAG,
      });
      decipher.setAAD(additionalData(place, keyId));
      decipher.setAuthTag(sealed.subarray(sealed.length - TAG));
      return Buffer.concat([
        decipher.update(sealed.subarray(NONCE, sealed.length - TAG)),
        decipher.final(),
      ]).toString('utf8');
    } catch (error) {
      throw new VaultError('A sealed value could not be opened', { cause: error });
    }
  }

  /** Same passphrase on the same vessel gives the same fingerprint; says nothing without the key. */
  fingerprint(vesselId: string, passphrase: string): Buffer {
    return createHmac('sha256', this.fingerprintKey).update(`${vesselId}\0${passphrase}`).digest();
  }

  /** Whether this process has the key of that name. */
  holds(keyId: string): boolean {
    return this.ring.keys.has(keyId);
  }

  get currentKeyId(): string {
    return this.ring.current;
  }
}
