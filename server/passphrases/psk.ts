import { pbkdf2 } from 'node:crypto';
import { promisify } from 'node:util';
import { checkPassphrase, checkSsid } from '../../shared/rules/passphrase.ts';

const derive = promisify(pbkdf2);

/**
 * PBKDF2 with HMAC-SHA1 (RFC 8018, 5.2), off the main thread. `length` is in octets; the result is hex.
 */
export async function pbkdf2Sha1(
  password: string,
  salt: string,
  iterations: number,
  length: number,
): Promise<string> {
  return (await derive(Buffer.from(password), Buffer.from(salt), iterations, length, 'sha1')).toString('hex');
}

/**
 * The 256-bit pre-shared key phones and access points derive, as 64 hex digits: PBKDF2-HMAC-SHA1 over the
 * passphrase with the SSID's UTF-8 octets as salt, 4096 iterations. Source: IEEE 802.11i-2004 H.4. Renaming
 * the SSID therefore changes the key. About 8 ms of one thread-pool thread.
 *
 * Throws RangeError, repeating neither value, when they are not ones a network can have.
 */
export async function derivePsk(passphrase: string, ssid: string): Promise<string> {
  const name = checkSsid(ssid);
  if (!name.ok) throw new RangeError(`No key can be derived for this network's name. ${name.reason}`);
  const secret = checkPassphrase(passphrase);
  if (!secret.ok) throw new RangeError(`No key can be derived for this passphrase. ${secret.reason}`);
  return pbkdf2Sha1(passphrase, ssid, 4096, 32);
}
