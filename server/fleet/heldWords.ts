import { z } from 'zod';

/** Why a planned change waits, by the planning rule's codes; the words hold no title and no name. */
const HELD: Record<string, string> = {
  owner_aboard: 'owner aboard',
  crossing: 'crossing under way',
  equipment: 'equipment in use under way',
  party_aboard: 'party aboard',
  arrival: 'an arrival is near',
};

const reasonCodes = z.array(z.looseObject({ code: z.string(), held: z.boolean().optional() }));

/**
 * The words for what holds a change back, or null when nothing does. Reads codes only: anything else in the
 * reasons, such as a party's name, stays on the vessel (guard R16).
 */
export function heldWords(reasons: unknown): string | null {
  const parsed = reasonCodes.safeParse(reasons);
  if (!parsed.success) return null;
  const held = parsed.data.find((reason) => reason.held === true);
  if (!held) return null;
  return HELD[held.code] ?? 'waiting for the vessel';
}
