import type { LogEntry } from '../../../shared/api/log.ts';
import { ROLE_NAMES } from '../../../shared/rules/permissions.ts';
import { shipDateTime } from '../../lib/shipTime.ts';

const FORMATS: Record<string, string> = {
  wallet: 'wallet card',
  'wallet-sheet': 'wallet cards on a sheet',
  cabin: 'cabin card',
};

function roles(text: string): string {
  return text
    .split(',')
    .map((role) => ROLE_NAMES[role as keyof typeof ROLE_NAMES] ?? role)
    .join(', ');
}

/** The facts of an entry that say something to a person, as one line; identifiers and figures for machines are left out. */
export function factsInWords({ facts }: LogEntry, zone: string, now: Date): string {
  const words: string[] = [];
  const text = (key: string) =>
    typeof facts[key] === 'string' || typeof facts[key] === 'number' ? String(facts[key]) : null;
  const add = (key: string, say: (value: string) => string) => {
    const value = text(key);
    if (value !== null && value !== '') words.push(say(value));
  };
  add('serial', (serial) => `card ${serial}`);
  add('format', (format) => FORMATS[format] ?? format);
  add('language', (language) => language.toUpperCase());
  add('count', (count) => `${count} in all`);
  add('guests', (count) => (count === '1' ? '1 guest' : `${count} guests`));
  add('dueAt', (at) => `for ${shipDateTime(at, zone, now)}`);
  add('movedFrom', (at) => `before: ${shipDateTime(at, zone, now)}`);
  add('roles', roles);
  add('ssid', (ssid) => ssid);
  add('what', (what) => what);
  add('seen', (seen) => `found: ${seen}`);
  add('ageLimitDays', (days) => `age limit ${days} days`);
  return words.join(', ');
}
