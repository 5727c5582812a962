import { createRequire } from 'node:module';
import { buffer } from 'node:stream/consumers';
import PDFDocument from 'pdfkit';
import QRCode from 'qrcode';
import { type CardInput, renderCards } from '../../print/cards.ts';
import { A4_SIZE, PER_SHEET, placeOnBack, placeOnFront } from '../../print/sheet.ts';
import { WALLET_SIZE } from '../../print/wallet.ts';
import { CARD_MESSAGES } from '../../shared/messages/card.ts';
import { wifiPayload } from '../../shared/rules/wifi.ts';
import { decodePdf } from '../support/decode.ts';

const CARDS = 1000;
const ROUNDS = 5;
const SINGLES = 15;
const WORDS = 'maple sextant orbit velvet drum lantern harbour quay abacus cinder'.split(' ');

const require = createRequire(import.meta.url);

/** Cards for sheets of ten; every `perNetwork` in a row share a network, so one payload. */
function makeCards(perNetwork: number): CardInput[] {
  return Array.from({ length: CARDS }, (_, i) => {
    const network = Math.floor(i / perNetwork);
    const ssid = `Tamarisk ${String(network).padStart(4, '0')}`;
    const words = [0, 3, 5, 7].map((step) => WORDS[(network * (step + 1) + step) % WORDS.length]);
    const passphrase = [...words, 1000 + network].join('-');
    return {
      serial: `M-${1000 + i}`,
      vesselName: 'Tamarisk',
      audience: 'guest',
      ssid,
      passphrase,
      payload: wifiPayload({ ssid, passphrase, security: 'wpa2', hidden: false }),
      language: 'en',
      validFrom: 'From Sun 14 June, 11:00',
      cautionDock: true,
    };
  });
}

const WEIGHTS = [300, 400, 500, 600] as const;
const INK = '#13222C';
const SOFT = '#52626D';

/** The same sheets by the plain way: pdfkit's own calls, WOFF fonts, a `rect()` for each run, no cache. */
async function renderPlain(cards: readonly CardInput[]): Promise<Buffer> {
  const doc = new PDFDocument({ autoFirstPage: false });
  for (const weight of WEIGHTS) {
    const file = require.resolve(`@fontsource/lexend/files/lexend-latin-${weight}-normal.woff`);
    doc.registerFont(`w${weight}`, file);
  }
  for (let start = 0; start < cards.length; start += PER_SHEET) {
    const sheet = cards.slice(start, start + PER_SHEET);
    for (const [place, draw] of [
      [placeOnFront, plainFront],
      [placeOnBack, plainBack],
    ] as const) {
      doc.addPage({ size: [...A4_SIZE], margin: 0 });
      sheet.forEach((card, i) => {
        const [x, y] = place(i);
        doc.save().translate(x, y);
        draw(doc, card);
        doc.restore();
      });
    }
  }
  doc.end();
  return buffer(doc as unknown as NodeJS.ReadableStream);
}

function plainText(
  doc: PDFKit.PDFDocument,
  text: string,
  x: number,
  y: number,
  size: number,
  weight: number,
  colour: string,
): number {
  doc.font(`w${weight}`).fontSize(size).fillColor(colour).text(text, x, y, { lineBreak: false });
  return x + doc.widthOfString(text);
}

function plainNeatline(doc: PDFKit.PDFDocument): void {
  const segment = WALLET_SIZE[0] / 24;
  for (let i = 0; i < 24; i += 2) doc.rect(i * segment, 0, segment, 4.8).fill(INK);
}

function plainFront(doc: PDFKit.PDFDocument, card: CardInput): void {
  plainNeatline(doc);
  const { size, data } = QRCode.create(card.payload, { errorCorrectionLevel: 'M' }).modules;
  for (let row = 0; row < size; row++) {
    for (let column = 0; column < size; column++) {
      const first = column;
      while (column < size && data[row * size + column]) column++;
      if (column === first) continue;
      doc.rect(12.6 + first * 2.88, 24 + row * 2.88, (column - first) * 2.88, 2.88).fill('#000000');
    }
  }
  plainText(doc, 'Network', 120, 40, 6, 400, SOFT);
  plainText(doc, card.ssid, 120, 49, 10.5, 600, INK);
  plainText(doc, 'Password', 120, 66, 6, 400, SOFT);
  let x = 120;
  let y = 75;
  for (const piece of card.passphrase.split(/(-)/u)) {
    if (x > 190) [x, y] = [120, y + 14];
    x = plainText(doc, piece, x, y, 11.5, piece === '-' ? 300 : 500, piece === '-' ? SOFT : INK);
  }
  plainText(doc, card.validFrom ?? '', 12.6, 140, 6, 400, SOFT);
  plainText(doc, card.serial, 210, 140, 6, 400, SOFT);
}

function plainBack(doc: PDFKit.PDFDocument, card: CardInput): void {
  const words = CARD_MESSAGES[card.language];
  plainNeatline(doc);
  doc.rect(108, 30, 27, 15).fill('#123E8C');
  plainText(doc, card.vesselName, 85, 60, 15, 600, INK);
  plainText(doc, `${words.welcome} ${words.audience.guest}`, 60, 80, 6.75, 400, SOFT);
  plainText(doc, words.handBack, 50, 100, 6.75, 500, INK);
  plainText(doc, words.caution[0], 60, 120, 5.5, 400, SOFT);
  plainText(doc, words.caution[1], 60, 128, 5.5, 400, SOFT);
}

async function seconds(work: () => Promise<unknown>): Promise<number> {
  const start = performance.now();
  await work();
  return (performance.now() - start) / 1000;
}

function median(values: readonly number[]): number {
  const sorted = [...values].sort((left, right) => left - right);
  return sorted[Math.floor(sorted.length / 2)] ?? Number.NaN;
}

const to = (digits: number, value: number) => Number(value.toFixed(digits));

/**
 * A thousand cards on sheets of ten, fronts and backs, against the plain way of making the same
 * sheets, in turn. The main figures are for a hundred networks of ten cards each, which share one
 * payload; those beginning with `unique` are for a thousand networks, where nothing is shared.
 * Afterwards every code of the main file is read back from 200 dpi.
 */
export async function bench(): Promise<Record<string, number>> {
  const shared = makeCards(10);
  const unique = makeCards(1);
  const times = { ours: [] as number[], oursUnique: [] as number[], plain: [] as number[] };
  await renderCards({ format: 'wallet-sheet', cards: shared.slice(0, 100) });
  await renderPlain(shared.slice(0, 100));
  for (let round = 1; round <= ROUNDS; round++) {
    times.ours.push(await seconds(() => renderCards({ format: 'wallet-sheet', cards: shared })));
    times.plain.push(await seconds(() => renderPlain(shared)));
    times.oursUnique.push(await seconds(() => renderCards({ format: 'wallet-sheet', cards: unique })));
    console.log(
      `round ${round} of ${ROUNDS}: ours ${to(2, times.ours.at(-1) ?? 0)} s, ` +
        `all unique ${to(2, times.oursUnique.at(-1) ?? 0)} s, plain ${to(2, times.plain.at(-1) ?? 0)} s`,
    );
  }
  const single: number[] = [];
  for (const card of shared.slice(0, SINGLES)) {
    single.push(1000 * (await seconds(() => renderCards({ format: 'wallet', cards: [card] }))));
  }

  const pdf = await renderCards({ format: 'wallet-sheet', cards: shared });
  const uniquePdf = await renderCards({ format: 'wallet-sheet', cards: unique });
  console.log(`reading ${CARDS} codes back at 200 dpi`);
  const [ours, plain, all] = [median(times.ours), median(times.plain), median(times.oursUnique)];
  return {
    cards: CARDS,
    networks: CARDS / 10,
    cardsPerSecond: to(0, CARDS / ours),
    plainPerSecond: to(0, CARDS / plain),
    ratio: to(2, plain / ours),
    oneCardWarmMs: to(1, median(single)),
    bytesPer1000: pdf.length,
    uniqueCardsPerSecond: to(0, CARDS / all),
    uniqueRatio: to(2, plain / all),
    uniqueBytesPer1000: uniquePdf.length,
    decoded: matched(await decodePdf(pdf, { dpi: 200 }), shared),
    of: CARDS,
  };
}

/** How many of the cards were read, each exactly once and exactly as it was made. */
function matched(found: readonly string[], cards: readonly CardInput[]): number {
  const left = new Map<string, number>();
  for (const text of found) left.set(text, (left.get(text) ?? 0) + 1);
  let count = 0;
  for (const { payload } of cards) {
    const remaining = left.get(payload) ?? 0;
    if (remaining === 0) continue;
    left.set(payload, remaining - 1);
    count++;
  }
  return count;
}
