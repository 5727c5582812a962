import { INK, MM, type Pen } from './pen.ts';
import { snap } from './qr.ts';
import { WALLET_SIZE } from './wallet.ts';

/** ISO 216 A4, in points: 210 mm by 297 mm, exact. Only what stands on the page is snapped. */
export const A4_SIZE: readonly [number, number] = [210 * MM, 297 * MM];

export const PER_SHEET = 10;

/** The neatline is drawn this far past a card's top edge, so that a cut a little off shows no white. */
export const BLEED_PT = 1 * MM;

const COLUMNS = 2;
const ROWS = PER_SHEET / COLUMNS;
const GUTTER_X = 6 * MM;
const GUTTER_Y = 3 * MM;
const [PAGE_WIDTH, PAGE_HEIGHT] = A4_SIZE;
const [CARD_WIDTH, CARD_HEIGHT] = WALLET_SIZE;
const LEFT = (PAGE_WIDTH - COLUMNS * CARD_WIDTH - GUTTER_X) / 2;
const TOP = (PAGE_HEIGHT - ROWS * CARD_HEIGHT - (ROWS - 1) * GUTTER_Y) / 2;

/** Top left corner of a card's front, 0 to 9 by rows, in points; on the printing grid. */
export function placeOnFront(index: number): readonly [number, number] {
  const column = index % COLUMNS;
  const row = Math.floor(index / COLUMNS);
  return [snap(LEFT + column * (CARD_WIDTH + GUTTER_X)), snap(TOP + row * (CARD_HEIGHT + GUTTER_Y))];
}

/** The same card's back: the front's place mirrored, for paper turned on its long edge. */
export function placeOnBack(index: number): readonly [number, number] {
  const [x, y] = placeOnFront(index);
  return [PAGE_WIDTH - x - CARD_WIDTH, y];
}

const MARK = 3.5 * MM;
const CLEAR = 1.2 * MM;

/** Hairlines where to cut, in the margins only: beside the rows, above and below the columns. */
export function drawCutMarks(pen: Pen): void {
  const [left] = placeOnFront(0);
  const [lastX, lastY] = placeOnFront(PER_SHEET - 1);
  const [, top] = placeOnFront(0);
  const right = lastX + CARD_WIDTH;
  const bottom = lastY + CARD_HEIGHT;
  for (let column = 0; column < COLUMNS; column++) {
    const [x] = placeOnFront(column);
    for (const edge of [x, x + CARD_WIDTH]) {
      mark(pen, [edge, top - CLEAR - MARK], [edge, top - CLEAR]);
      mark(pen, [edge, bottom + CLEAR], [edge, bottom + CLEAR + MARK]);
    }
  }
  for (let row = 0; row < ROWS; row++) {
    const [, y] = placeOnFront(row * COLUMNS);
    for (const edge of [y, y + CARD_HEIGHT]) {
      mark(pen, [left - CLEAR - MARK, edge], [left - CLEAR, edge]);
      mark(pen, [right + CLEAR, edge], [right + CLEAR + MARK, edge]);
    }
  }
}

function mark(pen: Pen, from: readonly [number, number], to: readonly [number, number]): void {
  pen.stroke(INK, 0.25, [from, to]);
}
