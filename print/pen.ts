import { fontRuns, textWidth, type Weight } from './fonts.ts';

/** A colour as the three numbers of a PDF `rg` operator. */
export type Colour = string;

const rgb = (hex: string): Colour =>
  [0, 2, 4].map((i) => +(Number.parseInt(hex.slice(i, i + 2), 16) / 255).toFixed(3)).join(' ');

/** Source of the values: the product's own colour tokens. The code itself is pure black. */
export const INK = rgb('13222C');
export const SOFT = rgb('52626D');
export const RULE = rgb('CFCDC2');
export const FLAG_BLUE = rgb('123E8C');
export const FLAG_RED = rgb('B4232A');
export const WHITE = rgb('FFFFFF');

export interface Span {
  readonly text: string;
  readonly weight: Weight;
  readonly colour: Colour;
}

/** Turns text into glyph numbers of the fonts embedded in one file. */
export interface Inkwell {
  encode(fontKey: string, run: ReturnType<typeof fontRuns>[number]): { id: string; hex: string };
}

/** One millimetre in points (72 to the inch). */
export const MM = 72 / 25.4;

/** A number as a PDF operand: thousandths of a point, no exponent. */
export function operand(value: number): string {
  return String(Math.round(value * 1000) / 1000);
}

export type Point = readonly [x: number, y: number];

/**
 * Collects PDF operators in points from the top left corner, y downwards; the page's own transform
 * turns them over. Text is placed by its baseline.
 */
export class Pen {
  readonly #parts: string[] = [];
  readonly #inkwell: Inkwell;

  constructor(inkwell: Inkwell) {
    this.#inkwell = inkwell;
  }

  toString(): string {
    return this.#parts.join('\n');
  }

  raw(operators: string): void {
    this.#parts.push(operators);
  }

  rects(colour: Colour, boxes: readonly (readonly [number, number, number, number])[]): void {
    const paths = boxes.map((box) => `${box.map(operand).join(' ')} re`);
    this.raw(`${colour} rg\n${paths.join('\n')} f`);
  }

  polygon(colour: Colour, points: readonly Point[]): void {
    this.raw(`${colour} rg\n${outline(points)} h f`);
  }

  /** A line through the points, open at its ends. */
  stroke(colour: Colour, width: number, points: readonly Point[], close = false): void {
    this.raw(`${colour} RG ${operand(width)} w\n${outline(points)}${close ? ' s' : ' S'}`);
  }

  /** One line of text from `x`; the spans follow each other without a gap. */
  line(x: number, baseline: number, size: number, spans: readonly Span[]): void {
    const parts = ['BT', `1 0 0 -1 ${operand(x)} ${operand(baseline)} Tm`];
    for (const span of spans) {
      if (span.text === '') continue;
      parts.push(`${span.colour} rg`);
      for (const run of fontRuns(span.text, span.weight)) {
        const { id, hex } = this.#inkwell.encode(run.font.key, run);
        parts.push(`/${id} ${operand(size)} Tf <${hex}> Tj`);
      }
    }
    parts.push('ET');
    this.raw(parts.join('\n'));
  }

  text(x: number, baseline: number, size: number, weight: Weight, colour: Colour, text: string) {
    this.line(x, baseline, size, [{ text, weight, colour }]);
  }

  centred(x: number, baseline: number, size: number, weight: Weight, colour: Colour, text: string) {
    this.text(x - textWidth(text, weight, size) / 2, baseline, size, weight, colour, text);
  }

  endingAt(x: number, baseline: number, size: number, weight: Weight, colour: Colour, text: string) {
    this.text(x - textWidth(text, weight, size), baseline, size, weight, colour, text);
  }
}

function outline(points: readonly Point[]): string {
  return points.map(([x, y], i) => `${operand(x)} ${operand(y)} ${i === 0 ? 'm' : 'l'}`).join(' ');
}
