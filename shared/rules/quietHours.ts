import { Temporal } from 'temporal-polyfill';
import { shipInstant, shipTime, type ZoneSpan, zoneAt } from './shipTime.ts';

/** Hours of a policy in which a change disturbs least: ISO weekdays (1 Monday) of their start, in ship's time. */
export interface QuietHours {
  readonly days: readonly number[];
  /** `HH:MM`. */
  readonly from: string;
  /** `HH:MM`; at or before `from` means the next day. */
  readonly to: string;
}

/** When nothing may be changed. */
export interface Span {
  readonly from: Date;
  readonly until: Date;
}

export interface QuietMoment {
  readonly at: Date;
  /** Ship's local date and time, zone and offset: the same moment is never used twice. */
  readonly occurrence: string;
}

interface Asked {
  readonly quietHours: readonly QuietHours[];
  readonly zones: readonly ZoneSpan[];
  readonly blocked: readonly Span[];
  /** Occurrences that were used or cancelled before. */
  readonly used: ReadonlySet<string>;
  /** What the change is planned by; part of the occurrence. */
  readonly rule: string;
}

/** A change needs this much of a quiet hour before it ends, in milliseconds. Common practice, no source. */
const ROOM_MS = 15 * 60_000;
/** Days searched ahead; longer than any voyage that blocks. */
const AHEAD_DAYS = 400;
const ANY_TIME: readonly QuietHours[] = [{ days: [1, 2, 3, 4, 5, 6, 7], from: '00:00', to: '00:00' }];

/** A moment's occurrence under a rule, as ship's clock shows it. */
export function occurrenceOf(rule: string, at: Date, zones: readonly ZoneSpan[]): string {
  const local = shipTime(zones, at);
  return `${rule} ${local.toPlainDateTime().toString({ smallestUnit: 'minute' })} ${zoneAt(zones, at)} ${local.offset}`;
}

/** The first free quiet moment at or after `from`; `from` itself, to the next five minutes, inside quiet hours. */
export function nextQuiet(asked: Asked, from: Date): QuietMoment {
  const start = roundUp(from);
  const first = shipTime(asked.zones, start).toPlainDate();
  for (let day = -1; day <= AHEAD_DAYS; day++) {
    for (const window of windowsOf(first.add({ days: day }), asked)) {
      const found = firstFree(asked, window, start);
      if (found) return found;
    }
  }
  const at = freeFrom(asked.blocked, start);
  return { at, occurrence: occurrenceOf(asked.rule, at, asked.zones) };
}

/** The start of the last free quiet hours at or before `before` and after `after`; null when there are none. */
export function lastQuiet(asked: Asked, before: Date, after: Date): QuietMoment | null {
  const earliest = shipTime(asked.zones, after).toPlainDate().subtract({ days: 1 });
  let date = shipTime(asked.zones, before).toPlainDate();
  for (; Temporal.PlainDate.compare(date, earliest) >= 0; date = date.subtract({ days: 1 })) {
    for (const { from } of windowsOf(date, asked).reverse()) {
      if (from.getTime() > before.getTime() || from.getTime() <= after.getTime()) continue;
      if (freeFrom(asked.blocked, from).getTime() !== from.getTime()) continue;
      const occurrence = occurrenceOf(asked.rule, from, asked.zones);
      if (!asked.used.has(occurrence)) return { at: from, occurrence };
    }
  }
  return null;
}

/** The first instant at or after `at` that lies in none of the spans. */
export function freeFrom(blocked: readonly Span[], at: Date): Date {
  let free = at.getTime();
  const ordered = [...blocked].sort((one, other) => one.from.getTime() - other.from.getTime());
  for (const span of ordered) {
    if (free >= span.from.getTime() && free < span.until.getTime()) free = span.until.getTime();
  }
  return new Date(free);
}

function firstFree(asked: Asked, window: Span, start: Date): QuietMoment | null {
  let at = new Date(Math.max(window.from.getTime(), start.getTime()));
  for (;;) {
    at = roundUp(freeFrom(asked.blocked, at));
    if (at.getTime() + ROOM_MS > window.until.getTime()) return null;
    const occurrence = occurrenceOf(asked.rule, at, asked.zones);
    if (!asked.used.has(occurrence)) return { at, occurrence };
    at = new Date(at.getTime() + ROOM_MS);
  }
}

/** Quiet hours that start on a local date, as instants, earliest first. They may pass midnight. */
function windowsOf(date: Temporal.PlainDate, asked: Asked): Span[] {
  const quiet = asked.quietHours.length > 0 ? asked.quietHours : ANY_TIME;
  return quiet
    .filter((hours) => hours.days.includes(date.dayOfWeek))
    .map((hours) => {
      const endDate = hours.to <= hours.from ? date.add({ days: 1 }) : date;
      return {
        from: shipInstant(asked.zones, date.toPlainDateTime(Temporal.PlainTime.from(hours.from))),
        until: shipInstant(asked.zones, endDate.toPlainDateTime(Temporal.PlainTime.from(hours.to))),
      };
    })
    .filter((window) => window.until.getTime() > window.from.getTime())
    .sort((one, other) => one.from.getTime() - other.from.getTime());
}

/** Changes are planned to five minutes. */
export const FIVE_MINUTES_MS = 5 * 60_000;
/** To the next whole five minutes. */
export const roundUp = (at: Date): Date =>
  new Date(Math.ceil(at.getTime() / FIVE_MINUTES_MS) * FIVE_MINUTES_MS);
