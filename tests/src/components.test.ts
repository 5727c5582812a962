import { create } from 'qrcode';
import { createElement } from 'react';
import { renderToStaticMarkup } from 'react-dom/server';
import { describe, expect, test } from 'vitest';
import { ageLabel, ageScaleTicks } from '../../src/components/ageScaleTicks.ts';
import { PassphraseWords } from '../../src/components/Passphrase.tsx';
import { QUIET_ZONE, qrPath } from '../../src/components/qrPath.ts';

describe('an age scale', () => {
  // The project's own design: 90-180-270 below 365, 7 below 14, 15-30 below 45.
  test.each([
    [365, [90, 180, 270]],
    [14, [7]],
    [45, [15, 30]],
    [7, [2, 4, 6]],
    [1, []],
    [730, [180, 360, 540]],
  ])('limit of %i days is labelled at %j', (limit, ticks) => {
    expect(ageScaleTicks(limit)).toEqual(ticks);
  });

  test('never has more than four labels, for every limit there can be', () => {
    for (let limit = 1; limit <= 730; limit += 1) {
      const ticks = ageScaleTicks(limit);
      expect(ticks.length).toBeLessThanOrEqual(4);
      for (const tick of ticks) expect(tick).toBeLessThan(limit * 0.88);
    }
  });

  test.each([
    [0, 'under an hour'],
    [0.5 / 24, 'under an hour'],
    [1 / 24, '1 hour'],
    [0.125, '3 hours'],
    [1, '1 day'],
    [1.99, '1 day'],
    [182.4, '182 days'],
  ])('%f days read as %s', (days, said) => {
    expect(ageLabel(days)).toBe(said);
  });
});

describe('a passphrase on a screen', () => {
  const drawn = (passphrase: string) =>
    renderToStaticMarkup(createElement(PassphraseWords, null, passphrase));
  const texts = (markup: string) =>
    [...markup.matchAll(/>([^<]+)</g)].map(([, text = '']) =>
      text.replaceAll('&quot;', '"').replaceAll('&#x27;', "'").replaceAll('&amp;', '&'),
    );

  test('keeps every character, words apart from separators, breaking only after a separator', () => {
    expect(texts(drawn('maple-sextant-drum'))).toEqual(['maple', '-', 'sextant', '-', 'drum']);
    expect(drawn('maple-sextant-drum').match(/<wbr\/>/g)).toHaveLength(2);
    for (const typed of ['a--b', '-x-', 'one_two.three', 'nowords', '!"#$%&\'()'])
      expect(texts(drawn(typed)).join('')).toBe(typed);
  });

  test('shows spaces, which count', () => {
    expect(texts(drawn('two words '))).toEqual(['two', '␣', 'words', '␣']);
  });
});

describe('a QR symbol as a path', () => {
  test('paints exactly the dark modules, inside a quiet zone of four (ISO/IEC 18004)', () => {
    const { modules } = create('WIFI:T:WPA;S:Aurora Guests;P:harbour-lantern-41;;', {
      errorCorrectionLevel: 'M',
    });
    const painted = new Set<string>();
    for (const [, x, y, width] of qrPath(modules).matchAll(/M(\d+) (\d+)h(\d+)v1h-\d+z/g)) {
      for (let step = 0; step < Number(width); step += 1) painted.add(`${Number(x) + step} ${y}`);
    }
    let dark = 0;
    for (let row = 0; row < modules.size; row += 1) {
      for (let column = 0; column < modules.size; column += 1) {
        const isDark = Boolean(modules.get(row, column));
        dark += isDark ? 1 : 0;
        expect(painted.has(`${column + QUIET_ZONE} ${row + QUIET_ZONE}`)).toBe(isDark);
      }
    }
    expect(painted.size).toBe(dark);
  });
});
