import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { visiblePieces, visibleText } from '../../src/lib/safeText.ts';

// Unicode Standard Annex 9, section 2: the explicit formatting characters and the implicit marks.
const BIDI = [
  '\u061c',
  '\u200e',
  '\u200f',
  '\u202a',
  '\u202b',
  '\u202c',
  '\u202d',
  '\u202e',
  '\u2066',
  '\u2067',
  '\u2068',
  '\u2069',
];

describe('R33: text that people typed', () => {
  test.each(BIDI)('direction control %j becomes a mark', (control) => {
    const shown = visibleText(`Ada${control}nna`);
    expect(shown).not.toContain(control);
    expect(shown).toMatch(/^Ada⟨[A-Z]{2,4}⟩nna$/);
  });

  test('names the override by its Unicode short name', () => {
    expect(visiblePieces('x\u202ey')).toEqual([
      { kind: 'text', text: 'x' },
      { kind: 'mark', name: 'RLO' },
      { kind: 'text', text: 'y' },
    ]);
  });

  test('other control characters and hidden spaces are marked by number or name', () => {
    expect(visibleText('a\u0000b\u007fc\u0085d\u200be\ufefff')).toBe(
      'a⟨U+0000⟩b⟨U+007F⟩c⟨U+0085⟩d⟨ZWSP⟩e⟨BOM⟩f',
    );
  });

  test('leaves names as they are: accents, Arabic, joiners, emoji, line breaks', () => {
    for (const name of [
      'Sigrún Ægisdóttir',
      'علی‌رضا',
      '👩‍✈️ Ana',
      'Ольга',
      'one\ntwo',
      '<img onerror=alert(1)>',
    ]) {
      expect(visibleText(name)).toBe(name);
    }
  });

  test('loses nothing that is not a control character', () => {
    fc.assert(
      fc.property(fc.string({ unit: 'grapheme' }), (text) => {
        const kept = visiblePieces(text)
          .filter((piece) => piece.kind === 'text')
          .map((piece) => piece.text)
          .join('');
        const marks = visiblePieces(text).filter((piece) => piece.kind === 'mark').length;
        expect([...kept].length + marks).toBe([...text].length);
      }),
    );
  });
});
