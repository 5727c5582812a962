import type { Security } from '../../../shared/api/common.ts';
import type { NetworkView } from '../../../shared/api/networks.ts';
import type { RotationSummary } from '../../../shared/api/rotations.ts';
import type { Audience } from '../../../shared/rules/permissions.ts';

/** Who a network is for, as the line under its name. */
export const AUDIENCE_LINE: Record<Audience, string> = {
  owner: 'Owner and family',
  guest: 'Guests and visitors',
  crew: 'Crew and crew mess',
};

export const SECURITY_WORDS: Record<Security, string> = {
  wpa2: 'WPA2',
  transition: 'WPA2 and WPA3 (transition)',
  wpa3: 'WPA3 only',
};

export const GRADE_WORDS = { weak: 'weak', fair: 'fair', strong: 'strong' } as const;

const people = (count: number): string => (count === 1 ? '1 person' : `${count} people`);

/** What people of an audience do when they leave: "2 have signed off". */
export const LEFT: Record<Audience, string> = { owner: 'left', guest: 'left', crew: 'signed off' };

/** "14 people hold it", and those of them who have left in a clause of its own; empty when nobody has. */
export function holdersWords({ holders, audience }: Pick<NetworkView, 'holders' | 'audience'>): {
  held: string;
  departed: string;
} {
  const { current, departed } = holders;
  const all = current + departed;
  if (all === 0) return { held: 'Nobody is on record as holding it', departed: '' };
  const held = `${people(all)} ${all === 1 ? 'holds' : 'hold'} it`;
  if (departed === 0) return { held: `${held}, ${all === 1 ? 'still aboard' : 'all current'}`, departed: '' };
  return { held, departed: `${departed} ${departed === 1 ? 'has' : 'have'} ${LEFT[audience]}` };
}

/** Lost cards and reported leaks of the passphrase in force: "1 card is lost", or null. */
export function leakWords(leaks: NetworkView['leaks']): string | null {
  const lost = leaks.filter(({ kind }) => kind === 'lost_card').length;
  const reported = leaks.length - lost;
  const parts = [
    lost > 0 ? `${lost === 1 ? '1 card is' : `${lost} cards are`} lost` : '',
    reported > 0 ? `${reported === 1 ? 'a leak is' : `${reported} leaks are`} reported` : '',
  ].filter(Boolean);
  return parts.length > 0 ? parts.join(' and ') : null;
}

/** Why a network is exposed, as a clause: "2 people who signed off still know its passphrase". */
export function exposureWords(network: NetworkView): string {
  const { departed } = network.holders;
  const leaks = leakWords(network.leaks);
  const gone =
    departed > 0
      ? `${people(departed)} who ${LEFT[network.audience]} still ${departed === 1 ? 'knows' : 'know'} its passphrase`
      : '';
  return [gone, leaks ?? ''].filter(Boolean).join(', and ');
}

/** Whether a change entered by hand has its passphrase and its time has come, so that only the entry is missing. */
export const awaitsEntry = (
  { state, driver, dueAt }: Pick<RotationSummary, 'state' | 'driver' | 'dueAt'>,
  now: Date,
): boolean => state === 'staged' && driver === 'by_hand' && Date.parse(dueAt) <= now.getTime();
