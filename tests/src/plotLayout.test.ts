import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { lanes, plotAxis, plotX, swarm } from '../../src/features/fleet/plotLayout.ts';

describe('the plot of ages', () => {
  test('is even up to the limit and doubles at even steps beyond it', () => {
    const axis = plotAxis(1000, [0.2, 3]);
    expect(plotX(axis, 0)).toBe(0);
    expect(plotX(axis, 0.5)).toBeCloseTo(plotX(axis, 1) / 2);
    const step = plotX(axis, 2) - plotX(axis, 1);
    expect(plotX(axis, 4) - plotX(axis, 2)).toBeCloseTo(step);
    expect(plotX(axis, 8)).toBeCloseTo(1000);
    expect(plotAxis(1000, [9]).end).toBe(16);
  });

  test('puts no mark that is pressed within 24 px of another (WCAG 2.2, success criterion 2.5.8)', () => {
    fc.assert(
      fc.property(fc.array(fc.integer({ min: 0, max: 600 }), { maxLength: 40 }), (xs) => {
        const placed = lanes(xs, (x) => x, 25);
        for (const [index, one] of placed.entries())
          for (const other of placed.slice(index + 1))
            expect(Math.hypot(one.x - other.x, one.y - other.y)).toBeGreaterThanOrEqual(24);
      }),
    );
  });

  test('keeps dots within the row, and apart while there is room', () => {
    const placed = swarm([10, 10, 10, 200], (x) => x, 5, 62);
    expect(placed.map(({ x }) => x)).toEqual([10, 10, 10, 200]);
    expect(new Set(placed.slice(0, 3).map(({ y }) => y)).size).toBe(3);
    for (const { y } of swarm(
      Array.from({ length: 50 }, () => 10),
      (x) => x,
      5,
      62,
    ))
      expect(Math.abs(y)).toBeLessThanOrEqual(26);
  });
});
