import type { Audience } from '../shared/rules/permissions.ts';
import { FLAG_BLUE, FLAG_RED, INK, type Pen, WHITE } from './pen.ts';

/** The neatline has a segment for each hour of the day, as on the vessel's pages. */
const SEGMENTS = 24;

/**
 * The graduated top edge: alternate ink and paper over a hairline.
 * @param bleed points drawn past the top and left edges, for cards cut out of a sheet.
 */
export function drawNeatline(pen: Pen, width: number, height: number, bleed = 0): void {
  const segment = width / SEGMENTS;
  const line = height / 11;
  pen.rects(INK, [
    ...Array.from({ length: SEGMENTS / 2 }, (_, i) => {
      const overhang = i === 0 ? bleed : 0;
      return [2 * i * segment - overhang, -bleed, segment + overhang, height + bleed] as const;
    }),
    [0, height - line, width, line],
  ]);
}

/** Width of a flag with its staff, as a share of its height. */
export const FLAG_ASPECT = 1.42;

/**
 * An etiquette flag on its staff: plain blue for the owner, blue with a white diagonal for guests,
 * a red pennant for crew. Shapes differ as well as colours, so they read in greyscale.
 */
export function drawFlag(pen: Pen, audience: Audience, x: number, y: number, height: number): void {
  const staff = height * 0.085;
  const left = x + staff;
  const right = x + height * FLAG_ASPECT;
  const top = y + height * 0.1;
  const bottom = y + height * 0.86;
  pen.rects(INK, [[x, y, staff, height]]);
  if (audience === 'crew') {
    pen.polygon(FLAG_RED, [
      [left, top],
      [right, (top + bottom) / 2],
      [left, bottom],
    ]);
    return;
  }
  pen.rects(FLAG_BLUE, [[left, top, right - left, bottom - top]]);
  if (audience === 'owner') return;
  const across = (right - left) * 0.26;
  const edge = height * 0.02;
  pen.polygon(WHITE, [
    [left + edge, top + edge],
    [left + across, top + edge],
    [right - edge, bottom - edge],
    [right - across, bottom - edge],
  ]);
}
