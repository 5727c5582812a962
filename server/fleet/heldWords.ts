import { z } from 'zod';

/** What holds a planned change back, by the plan's reason codes; the words hold no title and no name. */
const HELD: Record<string, string> = {
  owner_aboard: 'owner aboard',
  crossing: 'crossing under way',
};

const reasonCodes = z.array(z.looseObject({ code: z.string() }));

/**
 * The words for what holds a change back, or null when nothing does. Reads codes only: anything else in the
 * reasons stays on the vessel (R16).
 */
export function heldWords(reasons: unknown): string | null {
  const parsed = reasonCodes.safeParse(reasons);
  if (!parsed.success) return null;
  for (const { code } of parsed.data) {
    const words = HELD[code];
    if (words !== undefined) return words;
  }
  return null;
}
