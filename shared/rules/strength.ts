import type { WifiSecurity } from './wifi.ts';

/**
 * Guesses per second of somebody who recorded one phone joining by WPA2 and tries passphrases elsewhere, on
 * one consumer graphics card. Source: hashcat benchmark, mode 22000 (4096 PBKDF2-HMAC-SHA1 iterations each),
 * one NVIDIA RTX 4090: 2,539,800 per second. Published by others, not measured here.
 */
export const OFFLINE_GUESSES_PER_SECOND = 2_539_800;
/**
 * Attempts per second somebody within reach of the boat can make where nothing can be recorded (SAE only):
 * ten at each of five access points. Ten a second is the rate zxcvbn's documentation uses for an online
 * attack without throttling; five access points is a larger yacht. Common practice, no source.
 */
export const ONLINE_GUESSES_PER_SECOND = 50;
/** Guesses a made-up passphrase must stand on WPA2: about 1.25 years of full search by one graphics card. */
export const LEAST_OFFLINE_GUESSES = 1e14;

const MINUTE = 60;
const HOUR = 3600;
const DAY = 86_400;
/** The Julian year, in seconds, as in the published tables. */
export const YEAR_SECONDS = 31_557_600;
const MONTH = YEAR_SECONDS / 12;
const CENTURY = 100 * YEAR_SECONDS;
/** Beyond this, in seconds, a figure means nothing to anybody. */
const BEYOND = 10_000 * YEAR_SECONDS;

/** How hard one passphrase is: bits known from its draw, or the guesses estimated for one somebody made up. */
export type Hardness = { bits: number } | { guesses: number };
/** How well a passphrase stands. */
export type Grade = 'weak' | 'fair' | 'strong';

/** What can be said of one passphrase on one network. */
export interface Verdict {
  grade: Grade;
  /** Binary logarithm of the number of passphrases to try. */
  bits: number;
  /** `recorded`: guesses are tried elsewhere at full speed; `present`: only one by one, within reach of the boat. */
  attack: 'recorded' | 'present';
  /** Seconds until it is guessed, on average: half of the full search. */
  averageSeconds: number;
  /** "about 3 hours for someone who recorded one phone joining" */
  words: string;
  /** Why that attack applies, as a sentence. */
  why: string;
}

/** Bits of a generated passphrase as they are; of an estimate, its binary logarithm. */
export function hardnessBits(hardness: Hardness): number {
  if ('bits' in hardness) return hardness.bits;
  return Math.log2(Math.max(1, hardness.guesses));
}

/** Guesses per second that apply to a network. A transition network gives the WPA2 handshake away. */
export function guessRate(security: WifiSecurity): number {
  return security === 'wpa3' ? ONLINE_GUESSES_PER_SECOND : OFFLINE_GUESSES_PER_SECOND;
}

/** Seconds until one of `2^bits` equally likely passphrases is found, on average, at `rate` guesses a second. */
export function averageGuessSeconds(bits: number, rate: number): number {
  return 2 ** (bits - 1) / rate;
}

/** The fewest bits that are not weak on such a network, whatever its policy says. */
export function leastBits(security: WifiSecurity): number {
  return Math.log2((LEAST_OFFLINE_GUESSES * guessRate(security)) / OFFLINE_GUESSES_PER_SECOND);
}

/**
 * Judges a passphrase by how its network can be attacked. `strong`: longer than 10,000 years on average;
 * `weak`: under {@link leastBits}, or guessed before the network's age limit runs out. A made-up one is never
 * called strong, because zxcvbn puts phrases of words 10,000 times too high and more (measured).
 *
 * @param ageLimitDays the network's age limit in days, where it has one.
 */
export function verdict(input: { security: WifiSecurity; ageLimitDays?: number } & Hardness): Verdict {
  const bits = hardnessBits(input);
  const averageSeconds = averageGuessSeconds(bits, guessRate(input.security));
  const outlived = input.ageLimitDays !== undefined && averageSeconds < input.ageLimitDays * DAY;
  const beyond = averageSeconds >= BEYOND;
  let grade: Grade = beyond && 'bits' in input ? 'strong' : 'fair';
  if (bits < leastBits(input.security) || outlived) grade = 'weak';
  const attack = input.security === 'wpa3' ? 'present' : 'recorded';
  const who =
    attack === 'recorded'
      ? 'someone who recorded one phone joining'
      : 'someone trying one after another within reach of the boat';
  return {
    grade,
    bits,
    attack,
    averageSeconds,
    words: `${timeInWords(averageSeconds)}${beyond ? ', even' : ' for'} ${who}`,
    why: WHY[input.security],
  };
}

const WHY: Record<WifiSecurity, string> = {
  wpa2: 'With WPA2, one recorded join is enough to try passphrases elsewhere, as fast as a computer can.',
  transition:
    'Phones that still join by WPA2 can be recorded, so passphrases can be tried elsewhere, as fast as a computer can.',
  wpa3: 'With WPA3 alone, nothing recorded helps: each attempt has to be made here, at an access point.',
};

/**
 * Whether a passphrase may be used for a change. One drawn by Quayword needs the policy's bits; one somebody
 * made up also needs {@link leastBits} of the network's kind, even where the policy asks for less.
 */
export function strongEnough(policyLeastBits: number, security: WifiSecurity, hardness: Hardness): boolean {
  return hardnessBits(hardness) >= Math.max(policyLeastBits, leastBits(security));
}

/** The sentence for a passphrase that {@link strongEnough} refuses. */
export function weakSentence(security: WifiSecurity, hardness: Hardness): string {
  const { words } = verdict({ security, ...hardness });
  return `Too easy to guess: ${words}. Let Quayword make one, or use more words that do not belong together.`;
}

const UNITS: readonly { seconds: number; one: string; many: string }[] = [
  { seconds: 1, one: 'second', many: 'seconds' },
  { seconds: MINUTE, one: 'minute', many: 'minutes' },
  { seconds: HOUR, one: 'hour', many: 'hours' },
  { seconds: DAY, one: 'day', many: 'days' },
  { seconds: MONTH, one: 'month', many: 'months' },
  { seconds: YEAR_SECONDS, one: 'year', many: 'years' },
  { seconds: CENTURY, one: 'century', many: 'centuries' },
];

/** The unit a span is told in and how many of it: the first that, once rounded, stays below the next. */
function largestUnit(seconds: number): { count: number; one: string; many: string } {
  if (!(seconds >= 0)) throw new RangeError('A span of time is zero or more seconds.');
  let found = { count: 0, one: '', many: '' };
  for (const [index, unit] of UNITS.entries()) {
    found = { count: Math.round(seconds / unit.seconds), one: unit.one, many: unit.many };
    const next = UNITS[index + 1];
    if (next === undefined || found.count * unit.seconds < next.seconds) break;
  }
  return found;
}

/** A span of seconds in words, rounded in its largest unit: "about 33 minutes", "longer than anyone will try". */
export function timeInWords(seconds: number): string {
  const { count, one, many } = largestUnit(seconds);
  if (seconds >= BEYOND) return 'longer than anyone will try';
  if (count === 0) return 'less than a second';
  return `about ${count} ${count === 1 ? one : many}`;
}

/** The fleet table's one word for a span: "seconds", "hours", "years", "centuries". */
export function roughTime(seconds: number): string {
  return largestUnit(seconds).many;
}

/** The fleet table's word for a passphrase of so many bits on such a network: "hours to guess". */
export function roughGuess(security: WifiSecurity, bits: number): string {
  return `${roughTime(averageGuessSeconds(bits, guessRate(security)))} to guess`;
}
