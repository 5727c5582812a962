import { blockHeight, CAP_HEIGHT, type Fitted, fitSentence, fitText, linesHeight } from './fit.ts';
import { textWidth } from './fonts.ts';
import { drawFlag, drawNeatline, FLAG_ASPECT } from './marks.ts';
import { drawNetworkName, drawPassphrase, drawSymbol, fitPassphrase } from './passphrase.ts';
import { INK, MM, type Pen, RULE, SOFT } from './pen.ts';
import { fitWelcome, type PreparedCard } from './prepared.ts';
import { must, UnprintableText } from './printable.ts';
import { type QrRoom, type QrSymbol, QUIET_MODULES, snap } from './qr.ts';

/** ISO 216 A6, in points: 105 mm by 148 mm. */
export const CABIN_SIZE: readonly [number, number] = [105 * MM, 148 * MM];

/** Tried in turn: an ordinary network takes the first, the longest names and passwords the last. */
const SETTINGS = [
  { boxPt: 176.4, rowPad: 10 },
  { boxPt: 158.4, rowPad: 8 },
  { boxPt: 140.4, rowPad: 6 },
] as const;

const MOST_MODULE_PT = 3.6;

const [WIDTH, HEIGHT] = CABIN_SIZE;
const MARGIN = 23;
const INNER = WIDTH - 2 * MARGIN;
const NEATLINE = 6.6;
const VALUE_X = MARGIN + 62;
const VALUE_WIDTH = WIDTH - MARGIN - VALUE_X;
const FLAG = 18;
const NAME_X = MARGIN + FLAG * FLAG_ASPECT + 10;

/**
 * The card without its serial.
 * @param symbolFor encodes the payload for a room; asked again with a smaller one when the text
 *   needs the space.
 */
export function drawCabinCard(pen: Pen, card: PreparedCard, symbolFor: (room: QrRoom) => QrSymbol): void {
  drawNeatline(pen, WIDTH, NEATLINE);
  const top = drawHeading(pen, card);
  const bottom = drawFoot(pen, card) - 12;
  for (const { boxPt, rowPad } of SETTINGS) {
    const symbol = symbolFor({ boxPt, mostModulePt: MOST_MODULE_PT });
    const body = layOutBody(card, symbol, rowPad, bottom - top);
    if (body !== null) {
      drawBody(pen, card, symbol, body, top);
      return;
    }
  }
  throw new UnprintableText('password', []);
}

interface Body {
  readonly rowPad: number;
  readonly instruction: Fitted;
  readonly name: Fitted;
  readonly secret: Fitted;
  /** Space left over, in points. */
  readonly spare: number;
}

const INSTRUCTION_RISE = 8;
const BELOW_INSTRUCTION = 14;

/** Null when the password does not fit in what the symbol and the name leave. */
function layOutBody(card: PreparedCard, symbol: QrSymbol, rowPad: number, height: number): Body | null {
  const sentenceRoom = { width: INNER, height: 24, mostLines: 2, largest: 8.5, smallest: 7 };
  const instruction = must('printed wording', fitSentence(card.messages.instruction, 400, sentenceRoom));
  const nameRoom = { width: VALUE_WIDTH, height: 34, mostLines: 2, largest: 12, smallest: 8 };
  const name = must('network name', fitText(card.ssid, 600, nameRoom));
  const rows = 4 * rowPad + blockHeight(name);
  const sentence = INSTRUCTION_RISE + linesHeight(instruction) + BELOW_INSTRUCTION;
  const left = height - symbol.boxPt - sentence - rows;
  const secret = fitPassphrase(card.passphrase, {
    width: VALUE_WIDTH,
    height: left,
    mostLines: 4,
    largest: 12.5,
    smallest: 7,
  });
  if (secret === null) return null;
  return { rowPad, instruction, name, secret, spare: Math.max(0, left - blockHeight(secret)) };
}

function drawBody(pen: Pen, card: PreparedCard, symbol: QrSymbol, body: Body, headFoot: number): void {
  const { instruction, name, secret, rowPad } = body;
  const side = symbol.modules * symbol.modulePt;
  const quiet = QUIET_MODULES * symbol.modulePt;
  const top = snap(headFoot + quiet + Math.min(7, body.spare / 3));
  drawSymbol(pen, symbol, snap((WIDTH - side) / 2), top);
  let y = top + side + quiet + INSTRUCTION_RISE;
  instruction.lines.forEach((line, i) => {
    pen.centred(WIDTH / 2, y + i * instruction.leading, instruction.size, 400, SOFT, line);
  });
  y += linesHeight(instruction) + BELOW_INSTRUCTION;
  y = drawRow(pen, y, rowPad, card.messages.network, name, drawNetworkName);
  y = drawRow(pen, y, rowPad, card.messages.password, secret, drawPassphrase);
  rule(pen, y);
}

function drawRow(
  pen: Pen,
  top: number,
  rowPad: number,
  label: string,
  fitted: Fitted,
  drawValue: (pen: Pen, x: number, baseline: number, fitted: Fitted) => void,
): number {
  rule(pen, top);
  const baseline = top + rowPad + fitted.size * CAP_HEIGHT;
  pen.text(MARGIN, baseline, 7.25, 400, SOFT, label);
  drawValue(pen, VALUE_X, baseline, fitted);
  return top + 2 * rowPad + blockHeight(fitted);
}

function rule(pen: Pen, y: number): void {
  pen.stroke(RULE, 0.5, [
    [MARGIN, y],
    [WIDTH - MARGIN, y],
  ]);
}

/** Flag, vessel and welcome on the left, the guest and cabin on the right; returns its lower end. */
function drawHeading(pen: Pen, card: PreparedCard): number {
  const person = drawPerson(pen, card);
  const room = { width: WIDTH - MARGIN - NAME_X - person, height: 40, mostLines: 5 };
  const name = must(
    'vessel name',
    fitSentence(card.vesselName, 600, { ...room, largest: 17, smallest: 6.5 }),
  );
  const welcome = must('welcome line', fitWelcome(card, { ...room, largest: 7.5, smallest: 6 }));
  const first = HEAD_TOP + name.size * 0.72;
  name.lines.forEach((line, i) => {
    pen.text(NAME_X, first + i * name.leading, name.size, 600, INK, line);
  });
  const below = first + name.leading * (name.lines.length - 1) + 5.5 + welcome.size;
  welcome.lines.forEach((line, i) => {
    pen.text(NAME_X, below + i * welcome.leading, welcome.size, 400, SOFT, line);
  });
  const foot = below + welcome.leading * (welcome.lines.length - 1);
  drawFlag(pen, card.audience, MARGIN, (HEAD_TOP + foot - FLAG) / 2, FLAG);
  return foot + welcome.size * DESCENT;
}

const HEAD_TOP = 31;

/** How far letters reach below the baseline, as a share of the type size. */
const DESCENT = 0.25;

/** Returns the width it takes from the heading, with the gap beside it. */
function drawPerson(pen: Pen, card: PreparedCard): number {
  const room = { width: INNER * 0.36, height: 26, mostLines: 4 };
  const lines: { text: string; size: number; weight: 400 | 500 }[] = [];
  const add = (field: 'guest name' | 'cabin', text: string, weight: 400 | 500, largest: number) => {
    if (text === '') return;
    const fitted = must(field, fitText(text, weight, { ...room, largest, smallest: 5 }));
    for (const line of fitted.lines) lines.push({ text: line.trim(), size: fitted.size, weight });
  };
  add('guest name', card.guestName, 500, 8.5);
  add('cabin', card.cabin, 400, 7.5);
  let baseline = HEAD_TOP - 2;
  let widest = 0;
  for (const { text, size, weight } of lines) {
    baseline += size * 1.3;
    widest = Math.max(widest, textWidth(text, weight, size));
    const colour = weight === 500 ? INK : SOFT;
    pen.endingAt(WIDTH - MARGIN, baseline, size, weight, colour, text);
  }
  return widest === 0 ? 0 : widest + 12;
}

const FOOT_BASELINE = HEIGHT - 17;
const FOOT_SIZE = 6.5;
const FOOT_LEADING = 8.6;

/** The caution over the valid-from line; returns its top. */
function drawFoot(pen: Pen, card: PreparedCard): number {
  const room = { width: INNER * 0.7, height: 8, mostLines: 1, largest: FOOT_SIZE, smallest: 4.5 };
  const from = must('valid-from line', fitText(card.validFrom, 400, room));
  pen.text(MARGIN, FOOT_BASELINE, from.size, 400, SOFT, card.validFrom);
  if (!card.cautionDock) return FOOT_BASELINE - FOOT_SIZE * CAP_HEIGHT;

  const lines = card.messages.caution.flatMap((sentence) => {
    const wide = { ...room, width: INNER, height: 20, mostLines: 2, smallest: FOOT_SIZE };
    return must('printed wording', fitSentence(sentence, 400, wide)).lines;
  });
  const last = FOOT_BASELINE - 15;
  const first = last - (lines.length - 1) * FOOT_LEADING;
  lines.forEach((text, i) => {
    pen.text(MARGIN, first + i * FOOT_LEADING, FOOT_SIZE, 400, SOFT, text);
  });
  return first - FOOT_SIZE * CAP_HEIGHT;
}

/** @throws UnprintableText when it would reach into the valid-from line. */
export function drawCabinSerial(pen: Pen, serial: string): void {
  if (textWidth(serial, 400, FOOT_SIZE) > INNER * 0.3) throw new UnprintableText('serial', []);
  pen.endingAt(WIDTH - MARGIN, FOOT_BASELINE, FOOT_SIZE, 400, SOFT, serial);
}
