import { zoneOffset } from './shipTime.ts';

/** A zone a clock can be set to. */
export interface Zone {
  /** Its IANA name. */
  name: string;
  /** Where it is kept, in English: "Croatia"; for a fixed offset what it is. */
  place: string;
}

/** Whole hours at sea, from 12 west to 14 east. The IANA names count the other way round: Etc/GMT+3 is UTC-3. */
const FIXED: readonly Zone[] = Array.from({ length: 27 }, (_, index) => {
  const hours = index - 12;
  const offset = hours === 0 ? 'UTC' : `UTC${hours > 0 ? '+' : ''}${hours}`;
  const name = hours === 0 ? 'UTC' : `Etc/GMT${hours > 0 ? '-' : '+'}${Math.abs(hours)}`;
  return { name, place: `${offset}, no summer time` };
});

/** The country or region of a zone by the browser's own list (Unicode CLDR), or its last part. */
function placeOf(name: string): string {
  const fixed = FIXED.find((zone) => zone.name === name);
  if (fixed) return fixed.place;
  const words = new Intl.DateTimeFormat('en', { timeZone: name, timeZoneName: 'shortGeneric' })
    .formatToParts(0)
    .find((part) => part.type === 'timeZoneName')?.value;
  if (words?.endsWith(' Time')) return words.slice(0, -' Time'.length);
  return (name.split('/').at(-1) ?? name).replaceAll('_', ' ');
}

let all: readonly Zone[] | null = null;

/** Every zone there is to choose, gathered at the first call (about a third of a second). */
export function allZones(): readonly Zone[] {
  all ??= [
    ...Intl.supportedValuesOf('timeZone')
      .filter((name) => name !== 'UTC' && !name.startsWith('Etc/'))
      .map((name) => ({ name, place: placeOf(name) })),
    ...FIXED,
  ];
  return all;
}

const plain = (text: string) =>
  text.normalize('NFD').replace(/\p{M}/gu, '').toLowerCase().replaceAll(/[_/]/g, ' ').replaceAll('−', '-');

/**
 * The zones whose name, country or offset holds every word searched for; those that begin with the search come
 * first. `at` is when the offset is asked for.
 */
export function searchZones(search: string, at: Date, limit: number): { shown: Zone[]; matching: number } {
  const words = plain(search).split(/\s+/).filter(Boolean);
  const found: { zone: Zone; rank: number }[] = [];
  for (const zone of allZones()) {
    const text = plain(`${zone.name} ${zone.place}`);
    const offset = words.some((word) => word.startsWith('utc'))
      ? zoneOffset(zone.name, at).toLowerCase()
      : '';
    if (!words.every((word) => text.includes(word) || word === offset)) continue;
    const parts = text.split(' ');
    const isStart = words.every((word) => word === offset || parts.some((part) => part.startsWith(word)));
    // Who searches for an offset means the offset first, then the places that happen to keep it.
    const isOffset = words.includes(offset) && FIXED.includes(zone);
    const rank = isOffset ? 0 : isStart ? 1 : 2;
    found.push({ zone, rank });
  }
  found.sort((a, b) => a.rank - b.rank);
  return { shown: found.slice(0, limit).map(({ zone }) => zone), matching: found.length };
}

/** A zone as people say it: "Croatia, UTC+2", or "UTC-3, no summer time". */
export function zoneInWords(name: string, at: Date): string {
  try {
    const place = placeOf(name);
    return place.startsWith('UTC') ? place : `${place}, ${zoneOffset(name, at)}`;
  } catch {
    return name;
  }
}
