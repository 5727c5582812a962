import type { RotationSummary } from '../../../shared/api/rotations.ts';
import type { VoyageView } from '../../../shared/api/voyages.ts';
import { isUnderWay } from '../../../shared/rules/rotation.ts';
import { fromLocal, toLocal } from '../../lib/shipLocal.ts';

const DAY_MS = 86_400_000;
export const DAYS = 42;

/** Six weeks from the ship's midnight that has just passed. Instants in milliseconds. */
export interface Span {
  from: number;
  until: number;
}

export function sixWeeks(now: Date, zone: string): Span {
  const midnight = fromLocal(`${toLocal(now, zone).slice(0, 10)}T00:00`, zone);
  const from = midnight ? Date.parse(midnight) : now.getTime();
  return { from, until: from + DAYS * DAY_MS };
}

/** Where an instant stands between the ends, 0 to 1, kept inside. */
export function placeOf(at: number, { from, until }: Span): number {
  return Math.min(1, Math.max(0, (at - from) / (until - from)));
}

export interface Bar {
  voyage: VoyageView;
  left: number;
  width: number;
  /** Row from the top, so that stretches that overlap stand below each other. */
  row: number;
}

/** The voyages that touch the span, cut to it, in as few rows as keep them apart. */
export function voyageBars(voyages: readonly VoyageView[], span: Span): Bar[] {
  const ends: number[] = [];
  return voyages
    .map((voyage) => ({ voyage, starts: Date.parse(voyage.startsAt), ends: Date.parse(voyage.endsAt) }))
    .filter(({ starts, ends: end }) => end > span.from && starts < span.until)
    .sort((one, other) => one.starts - other.starts)
    .map(({ voyage, starts, ends: end }) => {
      const free = ends.findIndex((taken) => taken <= starts);
      const row = free < 0 ? ends.length : free;
      ends[row] = end;
      const left = placeOf(starts, span);
      return { voyage, left, width: placeOf(end, span) - left, row };
    });
}

export interface Mark {
  change: RotationSummary;
  /** When it happened, happens, or has been under way since. ISO. */
  at: string;
  /** `late`: its time has come and it has not begun. */
  state: 'done' | 'planned' | 'now' | 'late';
  left: number;
}

export interface PlacedMark extends Mark {
  /** Row from the top of the lane, so that marks near each other can each be pressed. */
  row: number;
}

/** Marks closer than this share of the six weeks stand below each other: a finger's width on a tablet. */
const APART = 0.045;

/** The marks of one lane in as few rows as keep them a finger apart. */
export function placeMarks(marks: readonly Mark[]): PlacedMark[] {
  const lasts: number[] = [];
  return [...marks]
    .sort((one, other) => one.left - other.left)
    .map((mark) => {
      const free = lasts.findIndex((last) => mark.left - last >= APART);
      const row = free < 0 ? lasts.length : free;
      lasts[row] = mark.left;
      return { ...mark, row };
    });
}

/** Changes of the span as marks: those that came into force, those planned, and those under way, at now. */
export function changeMarks(
  { calendar, history }: { calendar: readonly RotationSummary[]; history: readonly RotationSummary[] },
  span: Span,
  now: Date,
): Mark[] {
  const open = calendar.map((change): Mark => {
    const late = Date.parse(change.dueAt) < now.getTime();
    const under = isUnderWay(change.state);
    const at = under || late ? now.getTime() : Date.parse(change.dueAt);
    return {
      change,
      at: change.dueAt,
      state: under ? 'now' : late ? 'late' : 'planned',
      left: placeOf(at, span),
    };
  });
  const done = history.flatMap((change): Mark[] =>
    change.liveAt && Date.parse(change.liveAt) >= span.from
      ? [{ change, at: change.liveAt, state: 'done', left: placeOf(Date.parse(change.liveAt), span) }]
      : [],
  );
  return [...done, ...open]
    .filter(({ state, at }) => state !== 'planned' || Date.parse(at) < span.until)
    .sort((one, other) => Date.parse(one.at) - Date.parse(other.at));
}

export interface Tick {
  left: number;
  label: string;
}

/** A label each week: the day, with its month where the month is new. */
export function weekTicks(span: Span, zone: string): Tick[] {
  const ticks: Tick[] = [];
  let month = '';
  for (let day = 0; day <= DAYS; day += 7) {
    // Noon, so that an hour more or less in the ship's day does not move the date.
    const noon = new Date(span.from + day * DAY_MS + DAY_MS / 2);
    const name = new Intl.DateTimeFormat('en-GB', { timeZone: zone, month: 'long' }).format(noon);
    const date = new Intl.DateTimeFormat('en-GB', { timeZone: zone, day: 'numeric' }).format(noon);
    ticks.push({ left: day / DAYS, label: name === month ? date : `${date} ${name}` });
    month = name;
  }
  return ticks;
}
