import { describe, expect, it } from 'vitest';
import { type CardFormat, type CardInput, renderCards } from '../../print/cards.ts';
import { CARD_LANGUAGES } from '../../shared/messages/card.ts';
import { decodePdf, decodeWithJsqr } from '../support/decode.ts';
import { readAsNewAndroid, readAsZxing } from '../support/wifiParser.ts';
import { card, HARD_CARDS } from './sampleCards.ts';

const FORMATS: CardFormat[] = ['wallet', 'wallet-sheet', 'cabin'];
const payloads = (cards: readonly CardInput[]) => cards.map((each) => each.payload).sort();

/** A page of the wallet format is a front or a back, of the cabin format always a card. */
const frontPage = (format: CardFormat, index: number) => (format === 'wallet' ? 2 : 1) * index + 1;

describe('what a phone reads from the paper', () => {
  it.each(FORMATS)('%s: the exact payload in every language', async (format) => {
    const cards = CARD_LANGUAGES.map((language) => card({ language, ssid: `Tamarisk ${language}` }));
    const found = await decodePdf(await renderCards({ format, cards }));
    expect(found.sort()).toEqual(payloads(cards));
  });

  it.each(FORMATS)('%s: names and passwords of the hardest shapes (R45)', async (format) => {
    const found = await decodePdf(await renderCards({ format, cards: HARD_CARDS }));
    expect(found.sort()).toEqual(payloads(HARD_CARDS));
    for (const { ssid, passphrase, payload } of HARD_CARDS) {
      const read = readAsNewAndroid(found.find((text) => text === payload) ?? '');
      expect(read).toMatchObject({ ssid, password: passphrase, fields: ['T', 'S', 'P'] });
      expect(readAsZxing(payload)).toMatchObject({ ssid, password: passphrase, hidden: false });
    }
  });

  it('all ten of a sheet, each of another network', async () => {
    const cards = Array.from({ length: 10 }, (_, i) => card({ ssid: `Network ${i}` }));
    const found = await decodePdf(await renderCards({ format: 'wallet-sheet', cards }));
    expect(found).toHaveLength(10);
    expect(found.sort()).toEqual(payloads(cards));
  });

  it.each(['wallet', 'cabin'] as const)(
    '%s: four modules of white all round, measured on the raster (ISO/IEC 18004, quiet zone)',
    async (format) => {
      const cards = [card({ cautionDock: true, language: 'de' }), ...HARD_CARDS];
      const pdf = await renderCards({ format, cards });
      for (const [i, { payload }] of cards.entries()) {
        const found = await decodeWithJsqr(pdf, { page: frontPage(format, i), dpi: 200 });
        if (found === null) throw new Error(`No symbol seen on card ${i}.`);
        expect(found.text).toBe(payload);
        expect(whiteAround(found)).toBeGreaterThanOrEqual(4);
      }
    },
  );
});

/** Modules of white between the symbol's edge and the nearest other dot, on the closest side. */
function whiteAround(found: NonNullable<Awaited<ReturnType<typeof decodeWithJsqr>>>): number {
  const { page, left, top, side, modules } = found;
  const module = Math.round(side / modules);
  // The decoder's corners are a dot or two off. From inside the finder patterns' outer bars, which
  // are seven modules long, walk outwards to where the ink ends.
  const inBar = Math.round(module * 0.5);
  const alongBar = Math.round(module * 3.5);
  const [x, y] = [Math.round(left), Math.round(top)];
  const x0 = edge(page, x + inBar, y + alongBar, -1, 0)[0];
  const y0 = edge(page, x + alongBar, y + inBar, 0, -1)[1];
  const x1 = edge(page, Math.round(left + side) - inBar, y + alongBar, 1, 0)[0];
  const y1 = edge(page, x + alongBar, Math.round(top + side) - inBar, 0, 1)[1];
  // On the printing grid every module is the same whole number of dots.
  expect([x1 - x0 + 1, y1 - y0 + 1]).toEqual([modules * module, modules * module]);
  let white = 0;
  while (ringIsWhite(page, x0 - white - 1, y0 - white - 1, x1 + white + 1, y1 + white + 1)) white++;
  return white / module;
}

/** The last dark dot from a dark one in the direction given. */
function edge(page: Grey, x: number, y: number, dx: number, dy: number): [number, number] {
  expect(dark(page, x, y)).toBe(true);
  return dark(page, x + dx, y + dy) ? edge(page, x + dx, y + dy, dx, dy) : [x, y];
}

type Grey = { readonly width: number; readonly height: number; readonly grey: Uint8Array };

function dark(page: Grey, x: number, y: number): boolean {
  return (page.grey[y * page.width + x] ?? 255) < 128;
}

/** The edges are part of the ring. False as soon as it leaves the page, too. */
function ringIsWhite(page: Grey, x0: number, y0: number, x1: number, y1: number): boolean {
  if (x0 < 0 || y0 < 0 || x1 >= page.width || y1 >= page.height) return false;
  const at = (x: number, y: number) => page.grey[y * page.width + x] === 255;
  for (let x = x0; x <= x1; x++) if (!at(x, y0) || !at(x, y1)) return false;
  for (let y = y0; y <= y1; y++) if (!at(x0, y) || !at(x1, y)) return false;
  return true;
}
