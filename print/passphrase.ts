import { type Fitted, fitText, type Room, SEPARATOR } from './fit.ts';
import { textWidth } from './fonts.ts';
import { INK, operand, type Pen, SOFT, type Span } from './pen.ts';
import { EDGE_SHIFT_PT } from './qr.ts';

/** Longest passphrase, IEEE 802.11 (8 to 63 characters), needs sizes a name never does. */
export function fitPassphrase(text: string, room: Room): Fitted | null {
  return fitText(text, 500, room, SEPARATOR);
}

/**
 * Draws a passphrase as it is typed: words in a medium weight, separators light. A space cannot be
 * seen on paper, so each has a small open box under it, also at the end of a line.
 */
export function drawPassphrase(pen: Pen, x: number, firstBaseline: number, fitted: Fitted): void {
  fitted.lines.forEach((line, i) => {
    const baseline = firstBaseline + i * fitted.leading;
    pen.line(x, baseline, fitted.size, spans(line));
    drawSpaces(pen, x, baseline, fitted.size, line, () => true);
  });
}

/** Draws a network's name; only spaces that could be overlooked are marked. */
export function drawNetworkName(pen: Pen, x: number, firstBaseline: number, fitted: Fitted): void {
  const whole = fitted.lines.join('');
  let start = 0;
  fitted.lines.forEach((line, i) => {
    const baseline = firstBaseline + i * fitted.leading;
    const from = start;
    pen.text(x, baseline, fitted.size, 600, INK, line);
    drawSpaces(pen, x, baseline, fitted.size, line, (at) => overlooked(whole, from + at), 600);
    start += line.length;
  });
}

function overlooked(text: string, at: number): boolean {
  const first = at === 0 || text[at - 1] === ' ';
  const last = at === text.length - 1 || text[at + 1] === ' ';
  return first || last;
}

function spans(line: string): Span[] {
  return line.split(/([-_. ])/u).map((text) =>
    // The pattern captures what it splits at, so separators come back as pieces of their own.
    SEPARATOR.test(text)
      ? { text, weight: 300 as const, colour: SOFT }
      : { text, weight: 500 as const, colour: INK },
  );
}

function drawSpaces(
  pen: Pen,
  x: number,
  baseline: number,
  size: number,
  line: string,
  marked: (at: number) => boolean,
  weight: 500 | 600 = 500,
): void {
  let at = x;
  let index = 0;
  for (const character of line) {
    const light = weight === 500 && SEPARATOR.test(character);
    const width = textWidth(character, light ? 300 : weight, size);
    if (character === ' ' && marked(index)) {
      const [left, right] = [at + size * 0.03, at + width - size * 0.03];
      const [top, bottom] = [baseline - size * 0.06, baseline + size * 0.09];
      pen.raw('0 J 0 j');
      pen.stroke(SOFT, size * 0.06, [
        [left, top],
        [left, bottom],
        [right, bottom],
        [right, top],
      ]);
    }
    at += width;
    index += character.length;
  }
}

/** Draws a symbol with its top left module, not its quiet zone, at the point given. */
export function drawSymbol(
  pen: Pen,
  symbol: { readonly modulePt: number; readonly path: string },
  x: number,
  y: number,
): void {
  const module = operand(symbol.modulePt);
  const [left, top] = [operand(x + EDGE_SHIFT_PT), operand(y + EDGE_SHIFT_PT)];
  pen.raw(`q 0 g ${module} 0 0 ${module} ${left} ${top} cm\n${symbol.path} Q`);
}
