import type { FleetFigures } from '../../shared/api/fleet.ts';
import { type NextChangeKind, STANDINGS, type Standing } from '../../shared/rules/fleet.ts';
import { AUDIENCE_NAMES, AUDIENCES, type Audience } from '../../shared/rules/permissions.ts';
import { ageInDays, standingOf as standingRule } from '../../shared/rules/standing.ts';
import { roughGuess } from '../../shared/rules/strength.ts';
import type { NetworkFacts, VesselFacts } from './fleetFacts.ts';
import { heldWords } from './heldWords.ts';

const DAY_MS = 86_400_000;
/** A boat not heard for this long is silent, in milliseconds (common practice, no source). */
const SILENT_MS = DAY_MS;

/** Age of the live passphrase in days of 24 hours; null where none is on record. */
export function ageDays(network: NetworkFacts, now: Date): number | null {
  if (network.liveAt === null) return null;
  return ageInDays(network.liveAt, now);
}

/** Age divided by limit: above 1 is past it. */
export function ageRatio(network: NetworkFacts, now: Date): number | null {
  const age = ageDays(network, now);
  return age === null ? null : age / network.limitDays;
}

export const pastLimit = (network: NetworkFacts, now: Date): boolean => (ageRatio(network, now) ?? 0) > 1;

export const isSilent = (lastHeardAt: Date | null, now: Date): boolean =>
  lastHeardAt !== null && now.getTime() - lastHeardAt.getTime() >= SILENT_MS;

/** The sums the sentence is made of; each is a plain count over the same facts. */
export function fleetFigures(vessels: readonly VesselFacts[], now: Date): FleetFigures {
  const figures = {
    vessels: vessels.length,
    networks: 0,
    ageUnknown: 0,
    pastLimit: 0,
    pastLimitExposed: 0,
    heldByDeparted: 0,
    exposed: 0,
  };
  for (const network of vessels.flatMap((vessel) => vessel.networks)) {
    const past = pastLimit(network, now);
    figures.networks += 1;
    if (network.liveAt === null) figures.ageUnknown += 1;
    if (past) figures.pastLimit += 1;
    if (past && network.departed > 0) figures.pastLimitExposed += 1;
    if (network.departed > 0) figures.heldByDeparted += 1;
    if (network.departed > 0 || network.leaks > 0) figures.exposed += 1;
  }
  return figures;
}

/** From the easiest to guess to the hardest, as {@link roughGuess} words them. */
const GUESS_ORDER = ['seconds', 'minutes', 'hours', 'days', 'months', 'years', 'centuries'];

/** "hours to guess"; null where no passphrase is on record. Only these words may leave (R16). */
export function guessWords(network: NetworkFacts): string | null {
  return network.bits === null ? null : roughGuess(network.security, network.bits);
}

/** Place of the words, not of the bits: an order by bits would compare passphrases for whoever asks. */
export function guessRank(words: string): number {
  const place = GUESS_ORDER.indexOf(words.split(' ')[0] ?? '');
  return place < 0 ? GUESS_ORDER.length : place;
}

/** The vessel's network that is guessed soonest, in words; of equals the first audience. */
export function weakest(networks: readonly NetworkFacts[]): { audience: Audience; words: string } | null {
  let found: { audience: Audience; words: string; rank: number } | null = null;
  for (const audience of AUDIENCES) {
    for (const network of networks) {
      const words = network.audience === audience ? guessWords(network) : null;
      if (words === null) continue;
      const rank = guessRank(words);
      if (found === null || rank < found.rank) found = { audience, words, rank };
    }
  }
  return found && { audience: found.audience, words: `${AUDIENCE_NAMES[found.audience]}, ${found.words}` };
}

export interface NextChange {
  readonly kind: NextChangeKind;
  readonly audience: Audience | null;
  readonly dueAt: Date | null;
  readonly words: string;
}

const NOTHING_PLANNED: NextChange = { kind: 'none', audience: null, dueAt: null, words: 'None planned' };

/** What comes next on one network. Reasons are read by their codes: no free text of the vessel's gets through. */
export function nextChangeOf(network: NetworkFacts): NextChange {
  const { audience, change } = network;
  if (!change) return NOTHING_PLANNED;
  const { dueAt } = change;
  switch (change.state) {
    case 'needs_somebody':
      return { kind: 'needs_somebody', audience, dueAt, words: 'needs somebody aboard' };
    case 'unknown':
      return { kind: 'unknown', audience, dueAt, words: 'no report from the boat' };
    case 'handed_out':
    case 'applying':
      return { kind: 'under_way', audience, dueAt, words: 'under way' };
    case 'reconciling':
      return { kind: 'under_way', audience, dueAt, words: 'being checked after a restore' };
    case 'planned':
    case 'staged': {
      const held = heldWords(change.reasons);
      if (held !== null) return { kind: 'held', audience, dueAt, words: `held: ${held}` };
      return { kind: 'due', audience, dueAt, words: '' };
    }
    default:
      return NOTHING_PLANNED;
  }
}

const URGENCY: readonly NextChangeKind[] = ['needs_somebody', 'unknown', 'under_way', 'held', 'due', 'none'];

/** The vessel's next change: what is stuck first, then what is under way or held, then the earliest. */
export function nextChange(networks: readonly NetworkFacts[]): NextChange {
  const changes = networks.map(nextChangeOf).sort((one, other) => {
    const urgency = URGENCY.indexOf(one.kind) - URGENCY.indexOf(other.kind);
    return urgency !== 0 ? urgency : (one.dueAt?.getTime() ?? 0) - (other.dueAt?.getTime() ?? 0);
  });
  return changes[0] ?? NOTHING_PLANNED;
}

export function worstStanding(standings: readonly Standing[]): Standing {
  return standings.reduce<Standing>(
    (worst, one) => (STANDINGS.indexOf(one) > STANDINGS.indexOf(worst) ? one : worst),
    'in_order',
  );
}

/** In order, due, overdue or exposed. */
export const standingOf = (network: NetworkFacts, now: Date): Standing =>
  standingRule({ ratio: ageRatio(network, now), departed: network.departed, leaks: network.leaks });
