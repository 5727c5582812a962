import { randomBytes } from 'node:crypto';
import { beforeAll, describe, expect, test } from 'vitest';
import { type Config, Misconfigured, readConfig } from '../../../server/config.ts';
import { checkKeys } from '../../../server/db/keyCheck.ts';
import { Vault, VaultError } from '../../../server/db/vault.ts';
import { aboard } from '../../support/aboard.ts';
import { testEnv, useApp } from '../../support/app.ts';
import { childEnv, startServerProcess } from '../../support/seaTrial.ts';

const app = useApp();
const { make, look } = aboard(app);

beforeAll(async () => {
  const vesselId = await make.vessel();
  await make.network(vesselId, { live: 'what-is-in-force-now' });
});

const stored = () =>
  look('SELECT key_checks, (SELECT count(*)::int FROM passphrase_secrets) AS secrets FROM installation');

const withKeys = (given: { vault?: Config['vaultKeys']; fingerprint?: Buffer }) =>
  new Vault(
    given.vault ?? app.services.config.vaultKeys,
    given.fingerprint ?? app.services.config.fingerprintKey,
  );
const ring = (...entries: [string, Buffer][]): Config['vaultKeys'] => ({
  current: entries[0]?.[0] ?? '',
  keys: new Map(entries),
});
const own = (): Buffer => app.services.config.vaultKeys.keys.get('v1') ?? Buffer.alloc(0);

describe('R24: keys other than those the database was sealed with', () => {
  test.each<[string, () => Vault, RegExp]>([
    [
      'another key of the same name',
      () => withKeys({ vault: ring(['v1', randomBytes(32)]) }),
      /"v1" of VAULT_KEYS is not the one/,
    ],
    [
      'a new key without the one that rows still need',
      () => withKeys({ vault: ring(['v2', randomBytes(32)]) }),
      /VAULT_KEYS lacks the key "v1"/,
    ],
    [
      'a new key beside a wrong old one',
      () => withKeys({ vault: ring(['v2', randomBytes(32)], ['v1', randomBytes(32)]) }),
      /"v1" of VAULT_KEYS is not the one/,
    ],
    ['another fingerprint key', () => withKeys({ fingerprint: randomBytes(32) }), /FINGERPRINT_KEY is not/],
  ])('%s: refused with what is wrong, and nothing is written', async (_what, vault, sentence) => {
    const before = await stored();
    await expect(checkKeys(app.services.db, vault())).rejects.toThrow(VaultError);
    await expect(checkKeys(app.services.db, vault())).rejects.toThrow(sentence);
    expect(await stored()).toEqual(before);
  });

  test('the right ones pass as often as asked, and a new key before the old one is taken in', async () => {
    await checkKeys(app.services.db, app.services.vault);
    const grown = withKeys({ vault: ring(['v2', randomBytes(32)], ['v1', own()]) });
    await checkKeys(app.services.db, grown);
    await checkKeys(app.services.db, grown);
    const [row] = await look<{ key_checks: object }>('SELECT key_checks FROM installation');
    expect(Object.keys(row?.key_checks ?? {}).sort()).toEqual(['#fingerprint', 'v1', 'v2']);
    // No row was sealed with the second one, so it may go again.
    await checkKeys(app.services.db, app.services.vault);
  });

  test('a server with a wrong key says so and ends before it listens', async () => {
    const env = childEnv(app.services.config);
    const server = startServerProcess({ ...env, VAULT_KEYS: `v1:${randomBytes(32).toString('base64')}` });
    expect(await server.ended).toBe('1');
    expect(server.output()).toContain('"v1" of VAULT_KEYS is not the one of that name');
    expect(server.output()).not.toContain('serving');
  }, 60_000);

  test.each([
    ['VAULT_KEYS', undefined],
    ['VAULT_KEYS', 'v1:c2hvcnQ='],
    ['VAULT_KEYS', 'c2hvcnQ='],
    ['FINGERPRINT_KEY', undefined],
    ['PASSWORD_PEPPER', 'c2hvcnQ='],
    ['LOG_SIGNING_SEED', ''],
    ['SESSION_KEYS', undefined],
  ])('%s as %s is refused by name, and what it was is not repeated', (name, value) => {
    const env = { ...testEnv(app.appUrl), [name]: value };
    expect(() => readConfig(env)).toThrow(Misconfigured);
    expect(() => readConfig(env)).toThrow(new RegExp(name));
    expect(() => readConfig(env)).toThrow(/^(?!.*c2hvcnQ)/s);
  });
});

test('R22: the count of seals is refused at 2^32 (NIST SP 800-38D section 8.3)', async () => {
  const insert = (number: string) =>
    app.services.db.transaction({ kind: 'system' }, (tx) =>
      app.services.db.run(
        tx,
        'UPDATE passphrase_secrets SET seal_number = $number::bigint RETURNING seal_number',
        { number },
      ),
    );
  await expect(insert('4294967296')).rejects.toThrow(/seal_number/);
  expect(await insert('4294967295')).toEqual([{ seal_number: '4294967295' }]);
});
