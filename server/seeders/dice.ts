/** Repeatable choices for the demo's story. Never for a secret: those come from `crypto`. */
export interface Dice {
  /** At least 0, below 1. */
  next(): number;
  /** A whole number from `from` to `to`, both included. */
  between(from: number, to: number): number;
  pick<T>(from: readonly T[]): T;
}

/** Mulberry32, a public-domain generator of 32 bits of state: the same seed tells the same story. */
export function dice(seed: number): Dice {
  let state = seed >>> 0;
  const next = () => {
    state = (state + 0x6d2b79f5) >>> 0;
    let mixed = Math.imul(state ^ (state >>> 15), state | 1);
    mixed ^= mixed + Math.imul(mixed ^ (mixed >>> 7), mixed | 61);
    return ((mixed ^ (mixed >>> 14)) >>> 0) / 4_294_967_296;
  };
  const between = (from: number, to: number) => from + Math.floor(next() * (to - from + 1));
  return {
    next,
    between,
    pick: (from) => {
      const found = from[between(0, from.length - 1)];
      if (found === undefined) throw new RangeError('There is nothing to pick from');
      return found;
    },
  };
}
