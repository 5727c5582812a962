import { inflateSync } from 'node:zlib';
import { getDocument } from 'pdfjs-dist/legacy/build/pdf.mjs';
import { describe, expect, it } from 'vitest';
import { type CardFormat, type CardInput, renderCards, UnprintableText } from '../../print/cards.ts';
import { pdfInfo, pdfText } from '../support/decode.ts';
import { card } from './sampleCards.ts';

/** R44: text that would mean something to a PDF reader, were it ever written as anything but glyphs. */
const MEANINGFUL = [
  ') Tj ET Q',
  '/JS (app.alert(1)) /S /JavaScript',
  '<< /OpenAction 3 0 R >>',
  '\\)\\(\\\\',
  'endstream endobj',
  '%%EOF',
  '<b>Guest</b> &amp;',
  '/URI (https://example.org)',
  '/Launch /EmbeddedFile /AA',
];

/** R44: what no shipped font draws, or what cannot be seen. */
const NOT_PRINTABLE: [what: string, text: string, named: string][] = [
  ['emoji', 'Sea 🐚', 'U+1F41A'],
  ['Arabic', 'بحر', 'U+0628'],
  ['Chinese', '北斗', 'U+5317'],
  ['a mark that joins no letter', 'q\u0307x', 'U+0307'],
  ['NUL', 'Sea\u0000', 'U+0000'],
  ['a line break', 'Sea\nMist', 'U+000A'],
  ['a tab', 'Sea\tMist', 'U+0009'],
  ['a direction override', 'Sea\u202Etsim', 'U+202E'],
  ['a zero-width space', 'Sea\u200B', 'U+200B'],
  ['a soft hyphen', 'Sea\u00AD', 'U+00AD'],
  ['half a surrogate pair', 'Sea\uD83D', 'U+D83D'],
];

const FIELDS = ['vesselName', 'guestName', 'cabin'] as const;
const FORMATS: CardFormat[] = ['wallet', 'wallet-sheet', 'cabin'];

async function refusal(cards: CardInput[], format: CardFormat = 'wallet'): Promise<UnprintableText> {
  const error: unknown = await renderCards({ format, cards }).then(
    () => null,
    (reason: unknown) => reason,
  );
  if (error instanceof UnprintableText) return error;
  throw new Error('The card was printed.');
}

describe('text meant to harm (R44)', () => {
  it.each(FORMATS)('%s: comes out as the same text and nothing else', async (format) => {
    const cards = MEANINGFUL.map((text, i) =>
      card({
        vesselName: text,
        guestName: text,
        cabin: text,
        serial: `M-${i}`,
        payload: 'WIFI:T:WPA;S:x;P:12345678;;',
      }),
    );
    const pdf = await renderCards({ format, cards });
    const expected = { wallet: 2 * cards.length, 'wallet-sheet': 2, cabin: cards.length };
    expect((await pdfInfo(pdf)).get('Pages')).toBe(String(expected[format]));
    const text = (await pdfText(pdf)).replace(/\s+/gu, '');
    for (const meaningful of MEANINGFUL) expect(text).toContain(meaningful.replace(/\s+/gu, ''));
    await expectHarmless(pdf);
  });

  it.each(NOT_PRINTABLE)('refuses %s and says which character', async (_what, text, named) => {
    for (const field of FIELDS) {
      const error = await refusal([card(), card({ [field]: text })]);
      expect(error.message).toContain(named);
      expect(error.characters.length).toBeGreaterThan(0);
    }
    const error = await refusal([card({ ssid: text, payload: 'WIFI:T:WPA;S:x;P:12345678;;' })]);
    expect(error.field).toBe('network name');
  });

  it('prints letters written as letter and accent, joined (Unicode NFC)', async () => {
    const pdf = await renderCards({
      format: 'cabin',
      cards: [card({ guestName: 'Zoe\u0308 Bre\u0301mont' })],
    });
    expect(await pdfText(pdf)).toContain('Zo\u00EB Br\u00E9mont');
  });

  it.each(FORMATS)('%s: refuses ten thousand characters, prints what the limits allow', async (format) => {
    for (const field of FIELDS) {
      const error = await refusal([card({ [field]: 'Sea mist '.repeat(1111) })], format);
      expect(error.message).toContain('too long');
    }
    await renderCards({
      format,
      cards: [card({ vesselName: 'Sea mist '.repeat(13).trim(), guestName: 'Livia '.repeat(20).trim() })],
    });
  });

  it('never repeats a password in the refusal', async () => {
    const error = await refusal([
      card({ passphrase: 'geheim-ключ-北', payload: 'WIFI:T:WPA;S:x;P:12345678;;' }),
    ]);
    expect(error.field).toBe('password');
    expect(JSON.stringify([error.message, error.characters])).not.toMatch(/geheim|ключ|北|U\+/u);
  });

  it('draws no box in place of a letter', async () => {
    const pdf = await renderCards({
      format: 'cabin',
      cards: [card({ guestName: 'Łucja Đorđević', vesselName: 'Θάλασσα Ёлка', ssid: 'Ğ ß ő ț' })],
    });
    const shown = [...contents(pdf).matchAll(/<([0-9a-f]+)> Tj/gu)].map((match) => match[1] ?? '');
    expect(shown.length).toBeGreaterThan(10);
    for (const hex of shown) expect(hex.match(/.{4}/gu)).not.toContain('0000');
  });
});

/** The page contents in clear. */
function contents(pdf: Uint8Array): string {
  const file = Buffer.from(pdf);
  const found: string[] = [];
  for (let at = file.indexOf('stream\n'); at >= 0; at = file.indexOf('stream\n', at + 1)) {
    const end = file.indexOf('\nendstream', at);
    if (file.toString('latin1', at - 3, at) === 'end' || end < 0) continue;
    const packed = file.subarray(at + 7, end);
    if (packed[0] === 0x78) found.push(inflateSync(packed).toString('latin1'));
  }
  return found.join('\n');
}

/** Asks another PDF reader for everything in a file that can act, and reads the written objects too. */
async function expectHarmless(pdf: Uint8Array): Promise<void> {
  const task = getDocument({ data: new Uint8Array(pdf), verbosity: 0 });
  const file = await task.promise;
  expect(await file.getJSActions()).toBeNull();
  expect(await file.getOpenAction()).toBeNull();
  expect(await file.getAttachments()).toBeNull();
  for (let number = 1; number <= file.numPages; number++) {
    const page = await file.getPage(number);
    expect(await page.getAnnotations()).toEqual([]);
    expect(await page.getJSActions()).toBeNull();
  }
  await task.destroy();
  const objects = Buffer.from(pdf)
    .toString('latin1')
    .replace(/\nstream\n[\s\S]*?\nendstream/gu, '');
  expect(objects).toContain('/Type /Catalog');
  expect(objects).not.toMatch(
    /\/(JS|JavaScript|OpenAction|AA|Launch|URI|EmbeddedFiles?|RichMedia|AcroForm|Annots)\b/u,
  );
}
