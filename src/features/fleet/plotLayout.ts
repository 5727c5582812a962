/** Where the limit stands on the plot's width; beyond it the axis doubles at even steps. */
const LIMIT_AT = 0.58;
const LEAST_END = 8;

export interface PlotAxis {
  width: number;
  /** Right end as a multiple of the limit, a power of two, at least 8. */
  end: number;
}

/** The axis that fits these ratios of age to limit. */
export function plotAxis(width: number, ratios: readonly number[]): PlotAxis {
  const most = ratios.reduce((top, ratio) => Math.max(top, ratio), 1);
  return { width, end: Math.max(LEAST_END, 2 ** Math.ceil(Math.log2(most))) };
}

/** Pixels from the left for a ratio: even up to the limit, then one step for each doubling. */
export function plotX({ width, end }: PlotAxis, ratio: number): number {
  const limit = width * LIMIT_AT;
  if (ratio <= 1) return Math.max(0, ratio) * limit;
  return limit + (Math.log2(Math.min(ratio, end)) / Math.log2(end)) * (width - limit);
}

export interface Placed<T> {
  item: T;
  x: number;
  /** Pixels from the row's middle. */
  y: number;
}

/**
 * Places dots along a row so that none covers another: each takes the free place nearest to the middle. Where the row
 * is full a dot lies over others, so the row's height never grows.
 */
export function swarm<T>(
  items: readonly T[],
  xOf: (item: T) => number,
  radius: number,
  height: number,
): Placed<T>[] {
  const apart = radius * 2 + 1;
  const step = radius;
  const steps = Math.max(0, Math.floor((height / 2 - radius) / step));
  const offsets = [0];
  for (let index = 1; index <= steps; index += 1) offsets.push(index * step, -index * step);
  const sorted = [...items].map((item) => ({ item, x: xOf(item) })).sort((a, b) => a.x - b.x);
  const placed: Placed<T>[] = [];
  for (const { item, x } of sorted) {
    const near: Placed<T>[] = [];
    for (let index = placed.length - 1; index >= 0; index -= 1) {
      const other = placed[index];
      if (!other || x - other.x >= apart) break;
      near.push(other);
    }
    const free = offsets.find((y) =>
      near.every((other) => (other.x - x) ** 2 + (other.y - y) ** 2 >= apart ** 2),
    );
    placed.push({ item, x, y: free ?? offsets[placed.length % offsets.length] ?? 0 });
  }
  return placed;
}

/**
 * Places marks that are pressed so that none comes within `apart` pixels of another: alone in the middle of the row,
 * in company in two lanes, and where both are taken as little further right as will do.
 */
export function lanes<T>(items: readonly T[], xOf: (item: T) => number, apart: number): Placed<T>[] {
  const sorted = items.map((item) => ({ item, x: xOf(item) })).sort((a, b) => a.x - b.x);
  const last = { upper: Number.NEGATIVE_INFINITY, lower: Number.NEGATIVE_INFINITY };
  return sorted.map(({ item, x }, index) => {
    const next = sorted[index + 1]?.x ?? Number.POSITIVE_INFINITY;
    const alone = x - Math.max(last.upper, last.lower) >= apart && next - x >= apart;
    if (alone) {
      last.upper = x;
      last.lower = x;
      return { item, x, y: 0 };
    }
    const lane = last.upper <= last.lower ? 'upper' : 'lower';
    const at = Math.max(x, last[lane] + apart);
    last[lane] = at;
    return { item, x: at, y: ((lane === 'upper' ? -1 : 1) * apart) / 2 };
  });
}
