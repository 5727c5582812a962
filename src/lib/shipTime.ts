/** An instant as the API sends it (ISO 8601 with offset or Z), or as a Date. */
export type Instant = string | Date;

const formats = new Map<string, Intl.DateTimeFormat>();

function format(zone: string, options: Intl.DateTimeFormatOptions): Intl.DateTimeFormat {
  const key = `${zone} ${JSON.stringify(options)}`;
  const known = formats.get(key);
  if (known) return known;
  const made = new Intl.DateTimeFormat('en-GB', { timeZone: zone, calendar: 'gregory', ...options });
  formats.set(key, made);
  return made;
}

function asDate(instant: Instant): Date {
  return typeof instant === 'string' ? new Date(instant) : instant;
}

interface Wall {
  weekday: string;
  day: string;
  month: string;
  year: string;
  hour: string;
  minute: string;
}

function wall(instant: Instant, zone: string): Wall {
  const parts = format(zone, {
    weekday: 'short',
    day: 'numeric',
    month: 'long',
    year: 'numeric',
    hour: '2-digit',
    minute: '2-digit',
    hourCycle: 'h23',
  }).formatToParts(asDate(instant));
  const read = (type: Intl.DateTimeFormatPartTypes) => parts.find((part) => part.type === type)?.value ?? '';
  return {
    weekday: read('weekday'),
    day: read('day'),
    month: read('month'),
    year: read('year'),
    hour: read('hour'),
    minute: read('minute'),
  };
}

/** Whether two instants fall on the same calendar day in the vessel's zone. */
export function sameShipDay(a: Instant, b: Instant, zone: string): boolean {
  const one = wall(a, zone);
  const other = wall(b, zone);
  return one.day === other.day && one.month === other.month && one.year === other.year;
}

/** "14:06" in the vessel's zone. */
export function shipClock(instant: Instant, zone: string): string {
  const at = wall(instant, zone);
  return `${at.hour}:${at.minute}`;
}

/** "Sat 20 June", with the year when it is not the year of `now`. */
export function shipDate(instant: Instant, zone: string, now: Date): string {
  const at = wall(instant, zone);
  const year = at.year === wall(now, zone).year ? '' : ` ${at.year}`;
  return `${at.weekday} ${at.day} ${at.month}${year}`;
}

/** "Sat 20 June 10:00", with the year when it is not the year of `now`. */
export function shipDateTime(instant: Instant, zone: string, now: Date): string {
  return `${shipDate(instant, zone, now)} ${shipClock(instant, zone)}`;
}

/** "14:06" on the ship's today, otherwise the whole "Sat 20 June 10:00". */
export function shipMoment(instant: Instant, zone: string, now: Date): string {
  return sameShipDay(instant, now, zone) ? shipClock(instant, zone) : shipDateTime(instant, zone, now);
}

/** "today 14:06" on the ship's today, otherwise "Sat 20 June 10:00": for use inside a sentence. */
export function shipMomentInWords(instant: Instant, zone: string, now: Date): string {
  return sameShipDay(instant, now, zone)
    ? `today ${shipClock(instant, zone)}`
    : shipDateTime(instant, zone, now);
}

/** "UTC+2", "UTC+5:45", "UTC": the vessel's offset at that instant. */
export function zoneOffset(zone: string, at: Instant): string {
  const name =
    format(zone, { timeZoneName: 'longOffset' })
      .formatToParts(asDate(at))
      .find((part) => part.type === 'timeZoneName')?.value ?? 'GMT';
  const match = /([+-])(\d{2}):(\d{2})/.exec(name);
  if (!match || (match[2] === '00' && match[3] === '00')) return 'UTC';
  const [, sign, hours, minutes] = match;
  return `UTC${sign}${Number(hours)}${minutes === '00' ? '' : `:${minutes}`}`;
}

/**
 * How far through the ship's day an instant is by the clock on the wall: 0 at 00:00, 0.5 at 12:00, always
 * below 1. Days of 23 or 25 hours keep the wall's figures, so the hour label and the mark agree.
 */
export function dayFraction(instant: Instant, zone: string): number {
  const at = wall(instant, zone);
  return (Number(at.hour) * 60 + Number(at.minute)) / 1440;
}

const MINUTE = 60_000;
const HOUR = 60 * MINUTE;
const DAY = 24 * HOUR;

function counted(count: number, unit: string): string {
  return `${count} ${unit}${count === 1 ? '' : 's'}`;
}

/** A stretch in milliseconds as people say it: "under a minute", "14 min", "3 hours", "41 days". Never negative. */
export function inWords(milliseconds: number): string {
  const span = Math.max(0, milliseconds);
  if (span < MINUTE) return 'under a minute';
  if (span < HOUR) return `${Math.floor(span / MINUTE)} min`;
  if (span < 2 * DAY) return counted(Math.floor(span / HOUR), 'hour');
  return counted(Math.floor(span / DAY), 'day');
}

/** The age of an instant, in words ("41 days"); an instant ahead of `now` has no age and reads "under a minute". */
export function ageInWords(instant: Instant, now: Date): string {
  return inWords(now.getTime() - asDate(instant).getTime());
}

/** Time left until an instant, in words; past instants read "under a minute". */
export function untilInWords(instant: Instant, now: Date): string {
  return inWords(asDate(instant).getTime() - now.getTime());
}

/** Age in days as a fraction, for scales; never negative. */
export function ageInDays(instant: Instant, now: Date): number {
  return Math.max(0, (now.getTime() - asDate(instant).getTime()) / DAY);
}
