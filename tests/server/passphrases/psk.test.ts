import { execFile } from 'node:child_process';
import { promisify } from 'node:util';
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { derivePsk, pbkdf2Sha1 } from '../../../server/passphrases/psk.ts';
import { checkPassphrase, checkSsid } from '../../../shared/rules/passphrase.ts';

const run = promisify(execFile);

describe('the pre-shared key', () => {
  // IEEE 802.11i-2004 H.4.3 (the same three in 802.11-2012 M.4).
  test.each([
    ['password', 'IEEE', 'f42c6fc52df0ebef9ebb4b90b38a5f902e83fe1b135a70e23aed762e9710a12e'],
    ['ThisIsAPassword', 'ThisIsASSID', '0dc0d6eb90555ed6419756b9a15ec3e3209b63df707dd508d14581f8982721af'],
    ['a'.repeat(32), 'Z'.repeat(32), 'becb93866bb8c3832cb777c2f559807c8c59afcb6eae734885001300a981cc62'],
  ])('published vector: %s on %s', async (passphrase, ssid, psk) => {
    expect(await derivePsk(passphrase, ssid)).toBe(psk);
  });

  // Values of wpa_passphrase 2.10; the fourth and fifth differ in the SSID alone.
  test.each([
    [
      'harbour-lantern-41',
      'Aurora Guest',
      '41872abd9014355adedc5aae9a53543ebe3c83b44e4dd912e5ed301b9f2ef268',
    ],
    [
      'mooring-compass-72',
      'Aurora Guest',
      'db79a6d1a2623a20ab17f7d7d74bf0cecd7d29d67c47f754dff0897258630c99',
    ],
    ['keel-topsail-88', 'Aurora Guest', '552259605ccd1a1491001ec8ff25fa78527e0c2ef80869129ba35fb7544c7080'],
    ['keel-topsail-88', 'Aurora Crew', 'e73c93b8496394728fc83a1b558e12453b758a5f9f12992a9eabfba14d5d1fed'],
    [
      'owner-stateroom-19',
      'Aurora Owner',
      '7565d731f210979f5ce52f6c4a3e592fe761e2950b26783b200752ab0d7352ae',
    ],
    ['12345678', 'test', 'fe727aa8b64ac9b3f54c72432da14faed933ea511ecab15bbc6c52e7522f709a'],
    [
      'sillage42marine',
      'Émeraude Équipage',
      'd599f8acdcaab6e2384e3f1bcdb6b168902850b2dcca9f450b53091a213e7541',
    ],
  ])('%s on %s', async (passphrase, ssid, psk) => {
    expect(await derivePsk(passphrase, ssid)).toBe(psk);
  });

  test('equals wpa_passphrase for 50 random pairs', { timeout: 60_000 }, async () => {
    const ssid = fc.string({ unit: 'grapheme', minLength: 1, maxLength: 12 }).filter((text) => {
      // The tool takes both from its command line, so neither may look like an option.
      return checkSsid(text).ok && !text.startsWith('-');
    });
    const passphrase = fc
      .string({ unit: 'grapheme-ascii', minLength: 8, maxLength: 63 })
      .filter((text) => checkPassphrase(text).ok && !text.startsWith('-'));
    let compared = 0;
    for (const [name, secret] of fc.sample(fc.tuple(ssid, passphrase), 50)) {
      const { stdout } = await run('wpa_passphrase', [name, secret]);
      const theirs = /^\s+psk=([0-9a-f]{64})$/m.exec(stdout)?.[1];
      expect(await derivePsk(secret, name)).toBe(theirs);
      compared++;
    }
    expect(compared).toBe(50);
  });

  test('what no network can have is refused without being repeated', async () => {
    await expect(derivePsk('short-7', 'Aurora')).rejects.toThrow(/at least 8/);
    await expect(derivePsk('a'.repeat(64), 'Aurora')).rejects.toThrow(/64 digits/);
    await expect(derivePsk('paßwörter1', 'Aurora')).rejects.not.toThrow(/wörter/);
    await expect(derivePsk('harbour-lantern-41', 'É'.repeat(17))).rejects.toThrow(/34 octets/);
  });
});

// RFC 6070, section 2; its vector of 16,777,216 iterations takes 13 s and is left out.
describe('PBKDF2 with HMAC-SHA1', () => {
  test.each([
    ['password', 'salt', 1, 20, '0c60c80f961f0e71f3a9b524af6012062fe037a6'],
    ['password', 'salt', 2, 20, 'ea6c014dc72d6f8ccd1ed92ace1d41f0d8de8957'],
    ['password', 'salt', 4096, 20, '4b007901b765489abead49d926f721d065a429c1'],
    [
      'passwordPASSWORDpassword',
      'saltSALTsaltSALTsaltSALTsaltSALTsalt',
      4096,
      25,
      '3d2eec4fe41c849b80c8d83662c0e44a8b291a964cf2f07038',
    ],
    ['pass\0word', 'sa\0lt', 4096, 16, '56fa6aa75548099dcc37d7f03425e0c3'],
  ])('%j %j %i %i', async (password, salt, iterations, length, output) => {
    expect(await pbkdf2Sha1(password, salt, iterations, length)).toBe(output);
  });
});
