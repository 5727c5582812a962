import { describe, expect, it } from 'vitest';
import { type CardFormat, renderCards } from '../../print/cards.ts';
import { pdfBoxes, pdfInfo, pdfWords } from '../support/decode.ts';
import { card, FULL_CARDS } from './sampleCards.ts';

const MM = 72 / 25.4;

/** ISO/IEC 7810 ID-1; ISO 216 A4 and A6. */
const SIZES: [CardFormat, number, number][] = [
  ['wallet', 85.6, 53.98],
  ['wallet-sheet', 210, 297],
  ['cabin', 105, 148],
];

describe('paper sizes', () => {
  it.each(SIZES)('%s is %d by %d mm, to a hundredth of a point', async (format, width, height) => {
    for (const [wide, high] of pdfBoxes(await renderCards({ format, cards: FULL_CARDS }))) {
      expect(Math.abs(wide - width * MM)).toBeLessThan(0.01);
      expect(Math.abs(high - height * MM)).toBeLessThan(0.01);
    }
  });

  it.each([
    ['wallet', 15, 30],
    ['wallet-sheet', 10, 2],
    ['wallet-sheet', 11, 4],
    ['cabin', 15, 15],
  ] as const)('%s of %d cards has %d pages', async (format, cards, pages) => {
    const pdf = await renderCards({ format, cards: FULL_CARDS.slice(0, cards) });
    expect((await pdfInfo(pdf)).get('Pages')).toBe(String(pages));
  });

  it('lays every back behind its own front when the sheet is turned on its long edge', async () => {
    const cards = Array.from({ length: 10 }, (_, i) => card({ serial: `M-${i}`, vesselName: `Vessel${i}` }));
    const words = await pdfWords(await renderCards({ format: 'wallet-sheet', cards }));
    for (const i of cards.keys()) {
      const serial = words.find((word) => word.page === 1 && word.text === `M-${i}`);
      const vessel = words.find((word) => word.page === 2 && word.text === `Vessel${i}`);
      if (!serial || !vessel) throw new Error(`Card ${i} is not on both pages.`);
      const cardRight = serial.xMax + 12.6;
      const backMiddle = (vessel.xMin + vessel.xMax) / 2;
      expect(210 * MM - backMiddle).toBeCloseTo(cardRight - (85.6 / 2) * MM, 1);
      expect(Math.abs(vessel.yMin - serial.yMin)).toBeLessThan(53.98 * MM);
      expect(vessel.yMin).toBeLessThan(serial.yMin);
    }
  });

  it('keeps ten cards and their cut marks at least 3 mm inside the paper', async () => {
    const words = await pdfWords(
      await renderCards({ format: 'wallet-sheet', cards: FULL_CARDS.slice(0, 10) }),
    );
    for (const word of words) {
      expect(word.xMin).toBeGreaterThan(5 * MM);
      expect(word.xMax).toBeLessThan(205 * MM);
      expect(word.yMin).toBeGreaterThan(5 * MM);
      expect(word.yMax).toBeLessThan(292 * MM);
    }
  });

  it('refuses an empty print', async () => {
    await expect(renderCards({ format: 'cabin', cards: [] })).rejects.toThrow('Choose at least one');
  });
});
