import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  checkPassphrase,
  checkSsid,
  passphraseCautions,
  ssidCautions,
} from '../../../shared/rules/passphrase.ts';
import { WIFI_SECURITIES, type WifiAccess, wifiPayload } from '../../../shared/rules/wifi.ts';
import { readAsAlliance, readAsNewAndroid, readAsOldAndroid, readAsZxing } from '../../support/wifiParser.ts';

const plain: WifiAccess = {
  ssid: 'Aurora Guest',
  passphrase: 'harbour-lantern-41',
  security: 'wpa2',
  hidden: false,
};

// Source of the rows: ZXing wiki's escaping rule, and what ZXing core 3.4.1 and Android's parsers read.
describe('what is written', () => {
  test.each<[string, Partial<WifiAccess>, string]>([
    ['plain', {}, 'WIFI:T:WPA;S:Aurora Guest;P:harbour-lantern-41;;'],
    ['semicolon', { ssid: 'Sea;Wolf' }, 'WIFI:T:WPA;S:Sea\\;Wolf;P:harbour-lantern-41;;'],
    ['percent stays as it is', { ssid: 'Sea%3BWolf' }, 'WIFI:T:WPA;S:Sea%3BWolf;P:harbour-lantern-41;;'],
    ['colon', { ssid: 'Sea:Wolf' }, 'WIFI:T:WPA;S:Sea\\:Wolf;P:harbour-lantern-41;;'],
    ['comma', { ssid: 'Sea,Wolf' }, 'WIFI:T:WPA;S:Sea\\,Wolf;P:harbour-lantern-41;;'],
    ['quotes', { ssid: 'M/Y "Aurora"' }, 'WIFI:T:WPA;S:M/Y \\"Aurora\\";P:harbour-lantern-41;;'],
    ['backslash', { ssid: 'Sea\\Wolf' }, 'WIFI:T:WPA;S:Sea\\\\Wolf;P:harbour-lantern-41;;'],
    ['backslash last', { ssid: 'SeaWolf\\' }, 'WIFI:T:WPA;S:SeaWolf\\\\;P:harbour-lantern-41;;'],
    ['password, backslash last', { passphrase: 'password\\' }, 'WIFI:T:WPA;S:Aurora Guest;P:password\\\\;;'],
    ['spaces at both ends', { ssid: ' Aurora ' }, 'WIFI:T:WPA;S: Aurora ;P:harbour-lantern-41;;'],
    ['hex digits are not quoted', { ssid: 'ABCD' }, 'WIFI:T:WPA;S:ABCD;P:harbour-lantern-41;;'],
    ['hidden', { hidden: true }, 'WIFI:T:WPA;S:Aurora Guest;H:true;P:harbour-lantern-41;;'],
    ['transition', { security: 'transition' }, 'WIFI:T:WPA;S:Aurora Guest;P:harbour-lantern-41;;'],
    ['WPA3 only', { security: 'wpa3' }, 'WIFI:T:WPA;R:1;S:Aurora Guest;P:harbour-lantern-41;;'],
    [
      'WPA3 only, hidden',
      { security: 'wpa3', hidden: true },
      'WIFI:T:WPA;R:1;S:Aurora Guest;H:true;P:harbour-lantern-41;;',
    ],
    ['colon trap', { ssid: 'MY SHIP:A' }, 'WIFI:T:WPA;S:MY SHIP\\:A;P:harbour-lantern-41;;'],
    ['hidden trap', { ssid: 'BEACH:true' }, 'WIFI:T:WPA;S:BEACH\\:true;P:harbour-lantern-41;;'],
    ['field in a password', { passphrase: 'S:nope1234' }, 'WIFI:T:WPA;S:Aurora Guest;P:S\\:nope1234;;'],
  ])('%s', (_name, change, payload) => {
    const access = { ...plain, ...change };
    expect(wifiPayload(access)).toBe(payload);
    for (const read of [readAsZxing, readAsNewAndroid]) {
      expect(read(payload)).toMatchObject({
        ssid: access.ssid,
        password: access.passphrase,
        hidden: access.hidden,
        type: 'WPA',
      });
    }
  });

  test('a name or passphrase no network can have is refused without being repeated', () => {
    expect(() => wifiPayload({ ...plain, ssid: 'x'.repeat(33) })).toThrow(/33 octets/);
    expect(() => wifiPayload({ ...plain, ssid: '' })).toThrow(RangeError);
    expect(() => wifiPayload({ ...plain, passphrase: 'short-7' })).toThrow(/at least 8/);
    try {
      wifiPayload({ ...plain, passphrase: 'paßwörter1' });
      expect.unreachable();
    } catch (error) {
      expect(String(error)).not.toContain('wörter');
    }
  });
});

// The readers themselves, held to what the real ones were seen to do (ZXing core 3.4.1 run; Android by its
// source and unit tests), so that a mistake in a reader cannot hide one in the writer.
describe('the readers', () => {
  const P = 'harbour-lantern-41';
  test.each<[string, string | undefined, string | undefined, string | undefined, string | undefined]>([
    [`WIFI:T:WPA;S:Aurora Guest;P:${P};;`, 'Aurora Guest', 'Aurora Guest', 'Aurora Guest', 'Aurora Guest'],
    [`WIFI:S:Aurora Guest;T:WPA;P:${P};H:false;;`, 'Aurora Guest', 'Aurora Guest', 'Aurora Guest', undefined],
    [`WIFI:T:WPA;S:Sea\\;Wolf;P:${P};;`, 'Sea;Wolf', 'Sea;Wolf', 'Sea;Wolf', undefined],
    [`WIFI:T:WPA;S:Sea%3BWolf;P:${P};;`, 'Sea%3BWolf', 'Sea%3BWolf', 'Sea%3BWolf', 'Sea;Wolf'],
    [`WIFI:T:WPA;S:Sea\\:Wolf;P:${P};;`, 'Sea:Wolf', 'Sea:Wolf', 'Sea:Wolf', 'Sea\\:Wolf'],
    [`WIFI:T:WPA;S:Sea:Wolf;P:${P};;`, 'Sea:Wolf', 'Sea:Wolf', 'Sea:Wolf', 'Sea:Wolf'],
    [`WIFI:T:WPA;S:Sea\\,Wolf;P:${P};;`, 'Sea,Wolf', 'Sea,Wolf', 'Sea,Wolf', 'Sea\\,Wolf'],
    [`WIFI:T:WPA;S:"Aurora";P:${P};;`, '"Aurora"', 'Aurora', '"Aurora"', '"Aurora"'],
    [`WIFI:T:WPA;S:\\"Aurora\\";P:${P};;`, '"Aurora"', 'Aurora', '"Aurora"', '\\"Aurora\\"'],
    [`WIFI:T:WPA;S:Sea\\\\Wolf;P:${P};;`, 'Sea\\Wolf', 'Sea\\Wolf', 'Sea\\Wolf', 'Sea\\\\Wolf'],
    [`WIFI:T:WPA;S:SeaWolf\\\\;P:${P};;`, 'SeaWolf\\', undefined, 'SeaWolf\\', 'SeaWolf\\\\'],
    [`WIFI:T:WPA;S: Aurora ;P:${P};;`, ' Aurora ', ' Aurora ', ' Aurora ', ' Aurora '],
    [`WIFI:T:wpa;S:Aurora;P:${P};;`, 'Aurora', undefined, undefined, 'Aurora'],
    [`wifi:T:WPA;S:Aurora;P:${P};;`, undefined, undefined, undefined, undefined],
    ['WIFI:S:Aurora Open;;', 'Aurora Open', 'Aurora Open', 'Aurora Open', 'Aurora Open'],
    [`WIFI:T:WPA;P:S:nope1234;S:Aurora;;`, 'nope1234', 'Aurora', 'Aurora', undefined],
  ])('%s', (payload, zxing, oldAndroid, newAndroid, alliance) => {
    expect(readAsZxing(payload)?.ssid).toBe(zxing);
    expect(readAsOldAndroid(payload)?.ssid).toBe(oldAndroid);
    expect(readAsNewAndroid(payload)?.ssid).toBe(newAndroid);
    expect(readAsAlliance(payload)?.ssid).toBe(alliance);
  });

  test('what they make of passwords, hidden networks and WPA3', () => {
    expect(readAsOldAndroid('WIFI:T:WPA;S:Aurora;P:pass\\\\;;')?.password).toBe('pass\\;');
    expect(readAsZxing('WIFI:T:WPA;S:Aurora;P:pass\\\\;;')?.password).toBe('pass\\');
    expect(readAsZxing(`WIFI:T:WPA;S:MY SHIP:A;P:${P};;`)?.password).toBe('A');
    expect(readAsZxing(`WIFI:T:WPA;S:BEACH:true;P:${P};;`)?.hidden).toBe(true);
    expect(readAsZxing('WIFI:P:xxT:WEPabcd1;S:Aurora;T:WPA;;')?.type).toBe('WEPabcd1');
    expect(readAsNewAndroid(`WIFI:T:WPA;S:Aurora Crew;H:1;P:${P};;`)?.hidden).toBe(false);
    expect(readAsNewAndroid(`WIFI:T:WPA;R:1;S:Aurora Owner;P:${P};;`)?.saeOnly).toBe(true);
    expect(readAsAlliance(`WIFI:T:WPA;R:1;S:Aurora Owner;P:${P};;`)?.saeOnly).toBe(true);
    // Android 15's own unit test inputs.
    expect(readAsNewAndroid('WIFI:SSS:456 ;; S: test 123\\;; T:nopass')?.ssid).toBe(' test 123;');
    expect(readAsNewAndroid('WIFI:S:testAbC\\\\; T:nopass')?.ssid).toBe('testAbC\\');
    expect(readAsNewAndroid('WIFI:S:testAbC;T:nopass')?.ssid).toBe('testAbC');
  });
});

const special = fc.constantFrom(
  ...[
    '\\',
    ';',
    ',',
    '"',
    ':',
    '%',
    ' ',
    'S:',
    'P:',
    'H:true',
    'T:',
    ';P:x;;',
    ';;',
    '%3B',
    'É',
    '北',
    'ö',
    '🛥',
    'A1',
  ],
);
const character = fc.oneof(special, fc.string({ unit: 'grapheme-ascii', minLength: 1, maxLength: 4 }));
const ssid = fc
  .array(character, { minLength: 1, maxLength: 12 })
  .map((pieces) => pieces.join(''))
  .filter((text) => checkSsid(text).ok);
const passphrase = fc
  .array(character, { minLength: 2, maxLength: 30 })
  .map((pieces) => pieces.join(''))
  .filter((text) => checkPassphrase(text).ok);
const security = fc.constantFrom(...WIFI_SECURITIES);
const access = fc.record({ ssid, passphrase, security, hidden: fc.boolean() });

describe('R45: any pair comes back exactly through independent readers', () => {
  test('10,000 pairs, no field more, none fewer', () => {
    fc.assert(
      fc.property(access, (given) => {
        const payload = wifiPayload(given);
        const expected = { type: 'WPA', ssid: given.ssid, password: given.passphrase, hidden: given.hidden };
        expect(readAsZxing(payload)).toMatchObject(expected);
        const android = readAsNewAndroid(payload);
        expect(android).toMatchObject({ ...expected, saeOnly: given.security === 'wpa3' });
        const order = ['T', 'R', 'S', 'H', 'P'].filter(
          (field) => (field !== 'R' || given.security === 'wpa3') && (field !== 'H' || given.hidden),
        );
        expect(android?.fields).toEqual(order);
      }),
      { numRuns: 10_000 },
    );
  });

  test('where no caution is given, the older Android reader agrees too', () => {
    fc.assert(
      fc.property(access, (given) => {
        fc.pre(ssidCautions(given.ssid).length + passphraseCautions(given.passphrase).length === 0);
        const read = readAsOldAndroid(wifiPayload(given));
        expect(read).toMatchObject({ ssid: given.ssid, password: given.passphrase, hidden: given.hidden });
      }),
      { numRuns: 2_000 },
    );
  });

  test("letters, digits and hyphens read the same by all four, the Alliance's rule included", () => {
    const safe = (minLength: number, maxLength: number): fc.Arbitrary<string> =>
      fc.string({ unit: fc.constantFrom(...'abcdefghijklmnopqrstuvwxyz0123456789-'), minLength, maxLength });
    fc.assert(
      fc.property(safe(1, 32), safe(8, 63), security, fc.boolean(), (name, secret, kind, hidden) => {
        const payload = wifiPayload({ ssid: name, passphrase: secret, security: kind, hidden });
        for (const read of [readAsZxing, readAsNewAndroid, readAsOldAndroid, readAsAlliance]) {
          expect(read(payload)).toMatchObject({ ssid: name, password: secret, hidden });
        }
      }),
      { numRuns: 1_000 },
    );
  });
});
