import { blockHeight, CAP_HEIGHT, type Fitted, fitSentence, fitText, linesHeight, type Room } from './fit.ts';
import { textWidth, type Weight } from './fonts.ts';
import { drawFlag, drawNeatline, FLAG_ASPECT } from './marks.ts';
import { drawNetworkName, drawPassphrase, drawSymbol, fitPassphrase } from './passphrase.ts';
import { type Colour, INK, MM, type Pen, SOFT } from './pen.ts';
import { fitWelcome, type PreparedCard } from './prepared.ts';
import { must, UnprintableText } from './printable.ts';
import { type QrRoom, type QrSymbol, QUIET_MODULES, snap } from './qr.ts';

/** ISO/IEC 7810 ID-1, in points: 85.60 mm by 53.98 mm. */
export const WALLET_SIZE: readonly [number, number] = [85.6 * MM, 53.98 * MM];

export const WALLET_QR: QrRoom = { boxPt: 129.6, mostModulePt: 2.88 };

const [WIDTH, HEIGHT] = WALLET_SIZE;
const NEATLINE = 4.8;
const MARGIN = 12.6;
const FOOT_BASELINE = HEIGHT - 7.4;
const FOOT_SIZE = 6;
const LABEL_SIZE = 6;
/** Middle of the space between the neatline and the foot. */
const MIDDLE = 71.64;

/** Where the symbol's first module goes: on the printing grid, its quiet zone on the card. */
function symbolPlace(symbol: QrSymbol): { x: number; y: number; right: number } {
  const quiet = QUIET_MODULES * symbol.modulePt;
  const side = symbol.modules * symbol.modulePt;
  const x = snap(Math.max(MARGIN, quiet + 0.36));
  return { x, y: snap(MIDDLE - side / 2), right: x + side + quiet };
}

/** The front without its serial, which is the one thing that differs between cards of a network. */
export function drawWalletFront(pen: Pen, card: PreparedCard, symbol: QrSymbol, bleed: number): void {
  drawNeatline(pen, WIDTH, NEATLINE, bleed);
  const place = symbolPlace(symbol);
  drawSymbol(pen, symbol, place.x, place.y);
  drawJoinBlock(pen, card, place.right + 0.72);
  if (card.validFrom !== '') {
    const width = WIDTH - 2 * MARGIN - textWidth(card.serial, 400, FOOT_SIZE) - 10;
    const line = fitText(card.validFrom, 400, {
      width,
      height: 20,
      mostLines: 1,
      largest: FOOT_SIZE,
      smallest: 4.5,
    });
    const { size } = must('valid-from line', line);
    pen.text(MARGIN, FOOT_BASELINE, size, 400, SOFT, card.validFrom);
  }
}

export function drawWalletSerial(pen: Pen, serial: string): void {
  if (textWidth(serial, 400, FOOT_SIZE) > WIDTH / 3) throw new UnprintableText('serial', []);
  pen.endingAt(WIDTH - MARGIN, FOOT_BASELINE, FOOT_SIZE, 400, SOFT, serial);
}

/** Network over password, as one block centred beside the symbol. */
function drawJoinBlock(pen: Pen, card: PreparedCard, x: number): void {
  const width = WIDTH - x - MARGIN + 3;
  const name = must(
    'network name',
    fitText(card.ssid, 600, { width, height: 36, mostLines: 3, largest: 10.5, smallest: 6.5 }),
  );
  const labels = 2 * (LABEL_SIZE * 0.72 + 4) + 9;
  const room: Room = {
    width,
    height: 116 - labels - blockHeight(name),
    mostLines: 7,
    largest: 11.5,
    smallest: 6.5,
  };
  const secret = must('password', fitPassphrase(card.passphrase, room));
  const total = labels + blockHeight(name) + blockHeight(secret);

  let y = MIDDLE - total / 2 + LABEL_SIZE * 0.72;
  pen.text(x, y, LABEL_SIZE, 400, SOFT, card.messages.network);
  y += 4 + name.size * CAP_HEIGHT;
  drawNetworkName(pen, x, y, name);
  y += blockHeight(name) - name.size * CAP_HEIGHT + 9 + LABEL_SIZE * 0.72;
  pen.text(x, y, LABEL_SIZE, 400, SOFT, card.messages.password);
  drawPassphrase(pen, x, y + 4 + secret.size * CAP_HEIGHT, secret);
}

/** The back without the guest's name: flag, vessel, who it is for, and what to do with the card. */
export function drawWalletBack(pen: Pen, card: PreparedCard, bleed: number): void {
  drawNeatline(pen, WIDTH, NEATLINE, bleed);
  const room = { width: WIDTH - 2 * MARGIN, height: 32, mostLines: 3 };
  const name = must(
    'vessel name',
    fitSentence(card.vesselName, 600, { ...room, largest: 15, smallest: 6.5 }),
  );
  const welcome = must('welcome line', fitWelcome(card, { ...room, largest: 6.75, smallest: 5.5 }));
  const handBack = must(
    'printed wording',
    fitSentence(card.messages.handBack, 500, { ...room, largest: 6.75, smallest: 5 }),
  );
  const heights = [name, welcome, handBack].map(blockHeight);
  const total = heights.reduce((sum, height) => sum + height, FLAG + 10 + 8 + 14);
  const bottom = card.cautionDock ? CAUTION_BASELINE - 12 : HEIGHT - 26;
  let y = NEATLINE + 4 + Math.max(0, (bottom - NEATLINE - 4 - total) / 2);
  drawFlag(pen, card.audience, WIDTH / 2 - (FLAG * FLAG_ASPECT) / 2, y, FLAG);
  y = drawCentred(pen, name, 600, INK, y + FLAG + 10);
  y = drawCentred(pen, welcome, 400, SOFT, y + 8);
  drawCentred(pen, handBack, 500, INK, y + 14);
  if (card.cautionDock) drawCaution(pen, card);
}

const FLAG = 19;
const CAUTION_BASELINE = HEIGHT - 28.5;

function drawCaution(pen: Pen, card: PreparedCard): void {
  card.messages.caution.forEach((sentence, i) => {
    const { size } = must(
      'printed wording',
      fitText(sentence, 400, {
        width: WIDTH - 2 * MARGIN,
        height: 8,
        mostLines: 1,
        largest: 5.5,
        smallest: 4.5,
      }),
    );
    pen.centred(WIDTH / 2, CAUTION_BASELINE + i * 7.6, size, 400, SOFT, sentence);
  });
}

/** The guest's name and cabin, at the foot of the back. */
export function drawWalletGuest(pen: Pen, guestName: string, cabin: string): void {
  const text = [guestName, cabin].filter((part) => part !== '').join(', ');
  if (text === '') return;
  const room = { width: WIDTH - 2 * MARGIN, height: 10, mostLines: 2, largest: 6, smallest: 4 };
  const fitted = must('guest name', fitSentence(text, 400, room));
  drawCentred(pen, fitted, 400, INK, FOOT_BASELINE - blockHeight(fitted));
}

/** Returns the last baseline. */
function drawCentred(pen: Pen, fitted: Fitted, weight: Weight, colour: Colour, top: number): number {
  const first = top + fitted.size * CAP_HEIGHT;
  fitted.lines.forEach((line, i) => {
    const baseline = first + i * fitted.leading;
    pen.centred(WIDTH / 2, baseline, fitted.size, weight, colour, line);
  });
  return first + linesHeight(fitted);
}
