const STEPS = [1, 2, 7, 15, 30, 90, 180, 365];

/**
 * Where an age scale is labelled, in days: at most four even steps below the limit, none so near to the limit that
 * the two labels would run into each other.
 */
export function ageScaleTicks(limitDays: number): number[] {
  const step = STEPS.find((days) => limitDays / days <= 4.2) ?? Math.ceil(limitDays / 4);
  const ticks: number[] = [];
  for (let day = step; day < limitDays * 0.88; day += step) ticks.push(day);
  return ticks;
}

/** The age in words for a scale's pointer: "under an hour", "3 hours", "1 day", "41 days". */
export function ageLabel(days: number): string {
  const hours = Math.floor(days * 24);
  if (hours < 1) return 'under an hour';
  if (hours < 24) return `${hours} hour${hours === 1 ? '' : 's'}`;
  const whole = Math.floor(days);
  return `${whole} day${whole === 1 ? '' : 's'}`;
}
