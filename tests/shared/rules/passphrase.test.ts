import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  checkPassphrase,
  checkSsid,
  maskedDifference,
  passphraseCautions,
  ssidCautions,
  ssidOctets,
  wordsAndSeparators,
} from '../../../shared/rules/passphrase.ts';

function code(check: { ok: true } | { ok: false; code: string }): string {
  return check.ok ? 'ok' : check.code;
}

// IEEE 802.11-2012 M.4.1 (8–63, octets 32–126); wpa_passphrase 2.10's answers; R20.
describe('which passphrases a network can have', () => {
  test.each([
    ['7 characters', 'abcdefg', 'too-short'],
    ['8 characters', 'abcdefgh', 'ok'],
    ['63 characters', 'a'.repeat(63), 'ok'],
    ['64 characters', 'g'.repeat(64), 'too-long'],
    ['65 characters', 'a'.repeat(65), 'too-long'],
    ['64 hex digits', '0123456789abcdefABCDEF'.repeat(3).slice(0, 64), 'raw-key'],
    ['63 hex digits', '0123456789abcdef'.repeat(4).slice(0, 63), 'ok'],
    ['nothing', '', 'too-short'],
    ['a tab', 'with\ttab-in-it', 'character'],
    ['a NUL', 'with\0nul-in-it', 'character'],
    ['a line break', 'two\nlines-here', 'character'],
    ['0x7F', 'delete\x7f-here', 'character'],
    ['0x7E', 'tilde~~~~', 'ok'],
    ['0x20 inside', 'correct horse', 'ok'],
    ['non-ASCII, which wpa_passphrase itself takes', 'paßwörter1', 'character'],
    ['an emoji', 'harbour🛥lantern', 'character'],
    ['a space first', ' harbour-lantern', 'edge-space'],
    ['a space last', 'harbour-lantern ', 'edge-space'],
    ['every sign', ' !"#$%&\'()*+,-./:;<=>?@[\\]^_`{|}~'.trim(), 'ok'],
  ])('%s', (_name, text, expected) => {
    expect(code(checkPassphrase(text))).toBe(expected);
  });

  test('the sentence says what to do and repeats nothing of it', () => {
    const answer = checkPassphrase('paßwörter1');
    expect(answer).toEqual({ ok: false, code: 'character', reason: expect.stringMatching(/^Character 3 /) });
    expect(answer.ok ? '' : answer.reason).not.toMatch(/ß|wörter/);
  });

  test('a megabyte is refused by its length alone', () => {
    expect(code(checkPassphrase('ö'.repeat(1_000_000)))).toBe('too-long');
  });
});

// IEEE 802.11, SSID element; hostapd 2.10 refuses 33 octets.
describe('which names a network can have', () => {
  test.each([
    ['empty', '', 'empty'],
    ['one octet', 'A', 'ok'],
    ['32 octets', 'a'.repeat(32), 'ok'],
    ['33 octets', 'a'.repeat(33), 'too-long'],
    ['É × 16, 32 octets', 'É'.repeat(16), 'ok'],
    ['É × 16 and a, 33 octets in 17 characters', `${'É'.repeat(16)}a`, 'too-long'],
    ['8 emoji, 32 octets', '🛥'.repeat(8), 'ok'],
    ['9 emoji, 36 octets', '🛥'.repeat(9), 'too-long'],
    ['half a surrogate pair', 'Aurora \ud83d', 'malformed'],
    ['the other half', '\udee5 Aurora', 'malformed'],
    ['NUL', 'Aurora\0', 'control'],
    ['a line break', 'Aurora\nGuest', 'control'],
    ['C1 control', 'Aurora\u0085', 'control'],
    ['spaces at both ends', ' Aurora ', 'ok'],
  ])('%s', (_name, text, expected) => {
    expect(code(checkSsid(text))).toBe(expected);
  });

  test('octets are those of UTF-8', () => {
    expect(ssidOctets('Émeraude Équipage')).toBe(19);
  });
});

describe('cautions on the card preview', () => {
  test.each([
    ['SeaWolf\\', 1],
    ['"Aurora"', 1],
    ['Sea;Wolf', 1],
    ['Sea%Wolf', 1],
    ['Émeraude', 1],
    ['ABCD', 1],
    ['12345678', 1],
    [' Aurora', 1],
    ['Sea  Wolf', 1],
    ['É;\\', 3],
    ['Aurora Guest', 0],
    ['Sea\\Wolf', 0],
    ['"Aurora', 0],
    ['ABCD-', 0],
  ])('%s has %i', (ssid, count) => {
    expect(ssidCautions(ssid)).toHaveLength(count);
  });

  test('a typed passphrase has them too', () => {
    expect(passphraseCautions('harbour;lantern')).toHaveLength(1);
    expect(passphraseCautions('two  spaces')).toHaveLength(1);
    expect(passphraseCautions('harbour-lantern-41')).toEqual([]);
  });
});

describe('typing a passphrase back', () => {
  const expected = 'harbour-lantern-41';
  test.each([
    [expected, { same: true }],
    ['harbour-lantern-42', { same: false, lengthDifference: 0 }],
    ['Harbour-lantern-41', { same: false, lengthDifference: 0 }],
    ['harbour-lantern-4', { same: false, lengthDifference: -1 }],
    ['harbour-lantern-41 ', { same: false, lengthDifference: 1 }],
    ['', { same: false, lengthDifference: -18 }],
    [`${expected}${'x'.repeat(100)}`, { same: false, lengthDifference: 100 }],
    ['harbour\u2013lantern\u201341', { same: false, lengthDifference: 0 }],
  ])('%j', (typed, answer) => {
    expect(maskedDifference(typed, expected)).toMatchObject(answer);
  });

  test('the sentence gives the difference in length and nothing more', () => {
    const sentence = (typed: string): string => {
      const answer = maskedDifference(typed, expected);
      return answer.same ? '' : answer.sentence;
    };
    expect(sentence('harbour-lantern-4')).toContain('1 character too short');
    expect(sentence('harbour-lantern-4100')).toContain('2 characters too long');
    // Wrong in one place or in all of them, near the beginning or the end: the very same answer.
    expect(sentence('xarbour-lantern-41')).toBe(sentence('zzzzzzzzzzzzzzzzzz'));
    expect(sentence('xarbour-lantern-41')).toBe(sentence('harbour-lantern-4x'));
  });

  test('it agrees with plain equality for any two texts', () => {
    fc.assert(
      fc.property(fc.string({ maxLength: 70 }), fc.string({ maxLength: 63 }), (typed, held) => {
        expect(maskedDifference(typed, held).same).toBe(typed === held);
        expect(maskedDifference(held, held).same).toBe(true);
      }),
    );
  });
});

describe('reading aloud', () => {
  test('words and separators', () => {
    expect(wordsAndSeparators('harbour-lantern-41')).toEqual([
      { text: 'harbour', separator: false },
      { text: '-', separator: true },
      { text: 'lantern', separator: false },
      { text: '-', separator: true },
      { text: '41', separator: false },
    ]);
    expect(wordsAndSeparators('sillage42marine')).toEqual([{ text: 'sillage42marine', separator: false }]);
  });

  test('nothing is lost or added', () => {
    fc.assert(
      fc.property(fc.string({ unit: fc.constantFrom(...'ab1-_ ./;') }), (text) => {
        expect(
          wordsAndSeparators(text)
            .map((piece) => piece.text)
            .join(''),
        ).toBe(text);
      }),
    );
  });
});
