import { randomBytes } from 'node:crypto';
import { describe, expect, test } from 'vitest';
import type { KeyRing } from '../../../server/config.ts';
import { type Place, type Sealed, Vault, VaultError } from '../../../server/db/vault.ts';

const ring = (keys: Record<string, Buffer>, current: string): KeyRing => ({
  current,
  keys: new Map(Object.entries(keys)),
});
const keys = { v1: randomBytes(32), v2: randomBytes(32) };
const vault = new Vault(ring(keys, 'v1'), randomBytes(32));
const PLACE: Place = {
  table: 'passphrase_secrets',
  column: 'sealed',
  rowId: '3f0c6f57-2f6d-4d53-9d62-6d3f1f0f9f10',
  vesselId: 'b1a7c1ce-9d2c-4a5e-8f2f-4a7f2e9d1c11',
  networkId: '7d7f0c35-1b1e-4c57-a3c4-0b9e5f3d2a12',
  generation: 4,
};
const PLAIN = 'copper-lantern-otter-plum';

describe('R21: a sealed text opens in its own place and as it was, or not at all', () => {
  const sealed = vault.seal(PLACE, PLAIN);

  test('it opens, and is nonce, text and tag (NIST SP 800-38D)', () => {
    expect(vault.open(PLACE, sealed)).toBe(PLAIN);
    expect(sealed.sealed).toHaveLength(12 + PLAIN.length + 16);
    expect(sealed.sealed.toString('latin1')).not.toContain('copper');
  });

  test.each<[string, Place]>([
    ['another table', { ...PLACE, table: 'people' }],
    ['another column', { ...PLACE, column: 'fingerprint' }],
    ['another row', { ...PLACE, rowId: PLACE.vesselId ?? '' }],
    ['another vessel', { ...PLACE, vesselId: PLACE.networkId }],
    ['another network', { ...PLACE, networkId: PLACE.vesselId }],
    ['another generation', { ...PLACE, generation: 5 }],
    ['no vessel', { ...PLACE, vesselId: undefined }],
    ['no generation', { ...PLACE, generation: undefined }],
  ])('not in %s', (_what, place) => {
    expect(() => vault.open(place, sealed)).toThrow(VaultError);
  });

  test('not with any one bit changed, in any octet, nor cut off at any length, nor longer', () => {
    for (let index = 0; index < sealed.sealed.length; index += 1) {
      for (let bit = 0; bit < 8; bit += 1) {
        const changed = Buffer.from(sealed.sealed);
        changed[index] = (changed[index] ?? 0) ^ (1 << bit);
        expect(() => vault.open(PLACE, { ...sealed, sealed: changed })).toThrow(VaultError);
      }
      expect(() => vault.open(PLACE, { ...sealed, sealed: sealed.sealed.subarray(0, index) })).toThrow(
        VaultError,
      );
    }
    const longer = Buffer.concat([sealed.sealed, Buffer.alloc(1)]);
    expect(() => vault.open(PLACE, { ...sealed, sealed: longer })).toThrow(VaultError);
  });

  test('not under another key’s name, nor a name nobody has; every refusal reads the same', () => {
    const refused = (change: Partial<Sealed>): string => {
      try {
        return vault.open(PLACE, { ...sealed, ...change });
      } catch (error) {
        return error instanceof VaultError ? error.message : 'something else';
      }
    };
    const answers = [
      refused({ keyId: 'v2' }),
      refused({ keyId: 'v0' }),
      refused({ keyId: '' }),
      refused({ sealed: Buffer.alloc(0) }),
      refused({ sealed: Buffer.alloc(60) }),
    ];
    expect(new Set(answers)).toEqual(new Set(['A sealed value could not be opened']));
  });
});

describe('R22: nonces', () => {
  test('a million seals of one text repeat none', { timeout: 180_000 }, () => {
    // 96 random bits: two alike in a million have a chance of about 6 in 10^18 (NIST SP 800-38D section 8.3).
    const seen = new Set<string>();
    for (let count = 0; count < 1_000_000; count += 1)
      seen.add(vault.seal(PLACE, 'x').sealed.toString('latin1', 0, 12));
    expect(seen.size).toBe(1_000_000);
  });

  test('the same text sealed twice has nothing in common', () => {
    const [one, two] = [vault.seal(PLACE, PLAIN), vault.seal(PLACE, PLAIN)];
    const same = one.sealed.filter((octet, index) => octet === two.sealed[index]).length;
    // 53 octets alike by chance in 1 of 256 places each; ten or more have a chance below 10^-13.
    expect(same).toBeLessThan(10);
  });
});

describe('R23: a new key', () => {
  test('seals what is new, while the old one still opens what it sealed', () => {
    const before = vault.seal(PLACE, PLAIN);
    const after = new Vault(ring(keys, 'v2'), randomBytes(32));
    expect(after.open(PLACE, before)).toBe(PLAIN);
    expect(after.seal(PLACE, PLAIN).keyId).toBe('v2');
    const without = new Vault(ring({ v2: keys.v2 }, 'v2'), randomBytes(32));
    expect(() => without.open(PLACE, before)).toThrow(VaultError);
  });
});
