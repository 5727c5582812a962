import type { Readable } from 'node:stream';
import { buffer } from 'node:stream/consumers';
import { setImmediate as nextTurn } from 'node:timers/promises';
import { Book } from './book.ts';
import { CABIN_SIZE, drawCabinCard, drawCabinSerial } from './cabin.ts';
import { operand, Pen } from './pen.ts';
import { type CardInput, type PreparedCard, prepare } from './prepared.ts';
import { type QrRoom, type QrSymbol, qrSymbol } from './qr.ts';
import { A4_SIZE, BLEED_PT, drawCutMarks, PER_SHEET, placeOnBack, placeOnFront } from './sheet.ts';
import {
  drawWalletBack,
  drawWalletFront,
  drawWalletGuest,
  drawWalletSerial,
  WALLET_QR,
  WALLET_SIZE,
} from './wallet.ts';

export type { CardInput } from './prepared.ts';
export { UnprintableText } from './printable.ts';

/**
 * - `wallet`: ISO/IEC 7810 ID-1, a page for the front and one for the back of each card
 * - `wallet-sheet`: ten wallet cards to an A4 sheet with cut marks, then their backs, mirrored left
 *   to right for printing on both sides, turned on the long edge
 * - `cabin`: ISO 216 A6, one page each
 */
export type CardFormat = 'wallet' | 'wallet-sheet' | 'cabin';

export interface CardsInput {
  readonly format: CardFormat;
  readonly cards: readonly CardInput[];
  /** Replaces the card's "Welcome aboard."; the line that says who the network is for stays. */
  readonly welcomeLine?: string | null;
}

/**
 * The cards as one finished PDF.
 *
 * @throws UnprintableText when a text cannot be drawn or does not fit; no part of a file exists then.
 * @throws RangeError when there is no card, or the code is too large for the format.
 */
export async function renderCards(input: CardsInput): Promise<Buffer> {
  return buffer(await streamCards(input));
}

/**
 * The cards as a stream of PDF bytes. Everything that can be refused is refused before the stream
 * is handed over, so a file once begun is complete. Throws as `renderCards` does.
 */
export async function streamCards(input: CardsInput): Promise<Readable> {
  const [first] = input.cards;
  if (first === undefined) throw new RangeError('There is no card to print. Choose at least one.');
  const cards = input.cards.map((card) => prepare(card, input.welcomeLine ?? null));
  const book = new Book(first.language);
  const press = new Press(book);
  if (input.format === 'wallet-sheet') await printSheets(press, cards);
  else if (input.format === 'wallet') await printWallets(press, cards);
  else await printCabinCards(press, cards);
  book.document.end();
  return book.document as unknown as Readable;
}

/** Pages between two turns of the event loop, so that a long print does not hold up other requests. */
const PAGES_PER_TURN = 20;

async function printWallets(press: Press, cards: readonly PreparedCard[]): Promise<void> {
  for (const [i, card] of cards.entries()) {
    press.book.addPage(WALLET_SIZE, press.walletFront(card, 0));
    press.book.addPage(WALLET_SIZE, press.walletBack(card, 0));
    if (i % PAGES_PER_TURN === PAGES_PER_TURN - 1) await nextTurn();
  }
}

async function printCabinCards(press: Press, cards: readonly PreparedCard[]): Promise<void> {
  for (const [i, card] of cards.entries()) {
    press.book.addPage(CABIN_SIZE, press.cabin(card));
    if (i % PAGES_PER_TURN === PAGES_PER_TURN - 1) await nextTurn();
  }
}

async function printSheets(press: Press, cards: readonly PreparedCard[]): Promise<void> {
  const marks = new Pen(press.book);
  drawCutMarks(marks);
  for (let start = 0; start < cards.length; start += PER_SHEET) {
    const sheet = cards.slice(start, start + PER_SHEET);
    const fronts = sheet.map((card, i) => moved(placeOnFront(i), press.walletFront(card, BLEED_PT)));
    const backs = sheet.map((card, i) => moved(placeOnBack(i), press.walletBack(card, BLEED_PT)));
    press.book.addPage(A4_SIZE, [marks.toString(), ...fronts].join('\n'));
    press.book.addPage(A4_SIZE, backs.join('\n'));
    await nextTurn();
  }
}

function moved([x, y]: readonly [number, number], operators: string): string {
  return `q 1 0 0 1 ${operand(x)} ${operand(y)} cm\n${operators}\nQ`;
}

/**
 * Draws each part that cards share once: all cards of one network carry the same symbol, name and
 * passphrase. What is kept lasts only as long as the file being made, since it holds passphrases.
 */
class Press {
  readonly book: Book;
  readonly #symbols = new Map<string, QrSymbol>();
  readonly #parts = new Map<string, string>();

  constructor(book: Book) {
    this.book = book;
  }

  walletFront(card: PreparedCard, bleed: number): string {
    const key = ['front', card.payload, card.ssid, card.passphrase, card.language, card.validFrom];
    const shared = this.#part(key, (pen) =>
      drawWalletFront(pen, card, this.#symbol(card.payload, WALLET_QR), bleed),
    );
    return `${shared}\n${this.#draw((pen) => drawWalletSerial(pen, card.serial))}`;
  }

  walletBack(card: PreparedCard, bleed: number): string {
    const key = [
      'back',
      card.vesselName,
      card.audience,
      card.language,
      card.welcome,
      String(card.cautionDock),
    ];
    const shared = this.#part(key, (pen) => drawWalletBack(pen, card, bleed));
    return `${shared}\n${this.#draw((pen) => drawWalletGuest(pen, card.guestName, card.cabin))}`;
  }

  cabin(card: PreparedCard): string {
    const { messages, serial, ...rest } = card;
    const shared = this.#part(Object.values(rest).map(String), (pen) =>
      drawCabinCard(pen, card, (room) => this.#symbol(card.payload, room)),
    );
    return `${shared}\n${this.#draw((pen) => drawCabinSerial(pen, serial))}`;
  }

  #symbol(payload: string, room: QrRoom): QrSymbol {
    const key = `${room.boxPt} ${payload}`;
    const known = this.#symbols.get(key);
    if (known !== undefined) return known;
    const made = qrSymbol(payload, room);
    this.#symbols.set(key, made);
    return made;
  }

  #part(key: readonly string[], draw: (pen: Pen) => void): string {
    const name = JSON.stringify(key);
    const known = this.#parts.get(name);
    if (known !== undefined) return known;
    const made = this.#draw(draw);
    this.#parts.set(name, made);
    return made;
  }

  #draw(draw: (pen: Pen) => void): string {
    const pen = new Pen(this.book);
    draw(pen);
    return pen.toString();
  }
}
