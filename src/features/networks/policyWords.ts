import type { Security } from '../../../shared/api/common.ts';
import type { Policy } from '../../../shared/api/networks.ts';
import { averageGuessSeconds, guessRate, timeInWords } from '../../../shared/rules/strength.ts';

/** ISO weekdays, Monday first. */
export const WEEKDAYS = ['Mon', 'Tue', 'Wed', 'Thu', 'Fri', 'Sat', 'Sun'] as const;

/** "every day", "Mon to Fri", "Sat and Sun", "Mon, Wed, Fri". */
export function daysInWords(days: readonly number[]): string {
  const sorted = [...new Set(days)].sort((one, other) => one - other);
  const names = sorted.map((day) => WEEKDAYS[day - 1] ?? '');
  if (sorted.length === 7) return 'every day';
  const first = sorted[0] ?? 0;
  const inRow = sorted.every((day, index) => day === first + index);
  if (inRow && sorted.length > 2) return `${names[0]} to ${names.at(-1)}`;
  return names.length === 2 ? names.join(' and ') : names.join(', ');
}

/** "every day 10:30 to 11:30; Sat and Sun 23:00 to 02:00 the next day". */
export function quietHoursInWords(quiet: Policy['quietHours']): string {
  if (quiet.length === 0) return 'at any hour';
  return quiet
    .map(({ days, from, to }) => `${daysInWords(days)} ${from} to ${to}${to <= from ? ' the next day' : ''}`)
    .join('; ');
}

/** What so many bits mean on such a network: "about 3 years for someone who recorded one phone joining". */
export function bitsInWords(bits: number, security: Security): string {
  const time = timeInWords(averageGuessSeconds(bits, guessRate(security)));
  const who =
    security === 'wpa3'
      ? 'someone trying one after another within reach of the boat'
      : 'someone who recorded one phone joining';
  return time === 'longer than anyone will try' ? `${time}, even ${who}` : `${time} for ${who}`;
}

/** What moves a change up, as clauses; empty when nothing does. */
export function eventsInWords(policy: Policy): string[] {
  return [
    policy.onPartyDeparture ? 'a party leaves' : '',
    policy.onSignOff ? 'somebody who holds it signs off' : '',
    policy.onLostCard ? 'a card is lost' : '',
    policy.onLeak ? 'a leak is reported' : '',
  ].filter(Boolean);
}
