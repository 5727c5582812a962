import { Temporal } from 'temporal-polyfill';
import { plainly } from './plainText.ts';

/** A day, with the time of day where the list gives one, in ship's time; or an instant where it gives an offset. */
export interface Moment {
  readonly date: Temporal.PlainDate;
  readonly time: Temporal.PlainTime | null;
  readonly instant: Date | null;
}

export type Order = 'day_first' | 'month_first';

const MONTHS: readonly string[] = [
  'january|jan|janvier|janv|gennaio|gen|enero|ene|januar|janner',
  'february|feb|fevrier|fev|fevr|febbraio|febrero|februar',
  'march|mar|mars|marzo|marz|mrz',
  'april|apr|avril|avr|aprile|abril|abr',
  'may|mai|maggio|mag|mayo',
  'june|jun|juin|giugno|giu|junio|juni',
  'july|jul|juillet|juil|luglio|lug|julio|juli',
  'august|aug|aout|agosto|ago',
  'september|sep|sept|septembre|settembre|set|septiembre',
  'october|oct|octobre|ottobre|ott|octubre|oktober|okt',
  'november|nov|novembre|noviembre',
  'december|dec|decembre|dicembre|dic|diciembre|dezember|dez',
];
const MONTH_OF = new Map(
  MONTHS.flatMap((words, index) => words.split('|').map((word): [string, number] => [word, index + 1])),
);

const LONGEST = 60;
const NUMERIC = /^(\d{1,2})([/.-])(\d{1,2})\2(\d{4}|\d{2})$/;
const YEAR_FIRST = /^(\d{4})[-/.](\d{1,2})[-/.](\d{1,2})$/;
const OFFSET = /^\d{4}-\d{2}-\d{2}[T ]\d{2}:\d{2}(?::\d{2}(?:\.\d+)?)?(?:Z|[+-]\d{2}:?\d{2})$/;

/**
 * Which of day and month comes first, told over all dates of a list: a number above 12 cannot be a month, and dates
 * with dots put the day first (DIN 5008 and the custom of every country that writes them so). Null when nothing
 * depends on it; `ask` when something does and the list does not say, or says both.
 */
export function orderOf(cells: readonly string[]): Order | 'ask' | null {
  const says = new Set<Order>();
  let open = false;
  for (const cell of cells) {
    const [, first = '', mark = '', second = ''] = NUMERIC.exec(splitTime(cell).day) ?? [];
    if (mark === '' || mark === '.') continue;
    if (Number(first) > 12) says.add('day_first');
    else if (Number(second) > 12) says.add('month_first');
    else if (Number(first) !== Number(second)) open = true;
  }
  const [only, other] = says;
  if (only && !other) return only;
  return open ? 'ask' : null;
}

/**
 * A cell as a moment: 2026-06-14, 14/06/2026, 14.06.26, 14 June 2026, June 14 2026 and the like in English, French,
 * Italian, Spanish and German, alone or with 15:00, 15h00, 15.00 or 3 pm. Null for anything else.
 */
export function momentOf(cell: string, order: Order): Moment | null {
  const text = cell.trim();
  if (text === '' || text.length > LONGEST) return null;
  if (OFFSET.test(text)) return exact(text);
  const { day, time } = splitTime(text);
  const date = dateOf(day, order);
  if (!date) return null;
  if (time === null) return { date, time: null, instant: null };
  const clock = timeOf(time);
  return clock && { date, time: clock, instant: null };
}

function exact(text: string): Moment | null {
  try {
    const instant = Temporal.Instant.from(text.replace(' ', 'T'));
    const local = instant.toZonedDateTimeISO('UTC');
    return {
      date: local.toPlainDate(),
      time: local.toPlainTime(),
      instant: new Date(instant.epochMilliseconds),
    };
  } catch {
    return null;
  }
}

const TIME =
  /(?:^|[\sT,]+)((?:at |à |a las |alle |um )?\d{1,2}(?:(?:[:h.]\d{2}(?::\d{2})?)\s*(?:[ap]\.?m\.?|uhr|h)?|\s*[ap]\.?m\.?|\s*uhr|h))$/i;

function splitTime(cell: string): { day: string; time: string | null } {
  const text = cell.trim().slice(0, LONGEST);
  const found = TIME.exec(text);
  // "14.06" alone is no time behind a date.
  if (!found || found.index === 0) return { day: text, time: null };
  return { day: text.slice(0, found.index).trim(), time: found[1] ?? null };
}

function timeOf(text: string): Temporal.PlainTime | null {
  const [, hours = '', minutes = '0', half = ''] =
    /(\d{1,2})(?:[:h.](\d{2})(?::\d{2})?)?\s*([ap])?/i.exec(text) ?? [];
  let hour = Number(hours);
  if (half !== '') {
    if (hour < 1 || hour > 12) return null;
    hour = (hour % 12) + (half.toLowerCase() === 'p' ? 12 : 0);
  }
  if (hour > 23 || Number(minutes) > 59) return null;
  return new Temporal.PlainTime(hour, Number(minutes));
}

function dateOf(text: string, order: Order): Temporal.PlainDate | null {
  const [, y = '', m = '', d = ''] = YEAR_FIRST.exec(text) ?? [];
  if (y !== '') return calendarDay(Number(y), Number(m), Number(d));
  const [, first = '', mark = '', second = '', year = ''] = NUMERIC.exec(text) ?? [];
  if (mark !== '') {
    // A number above 12 is the day wherever it stands.
    const dayFirst = mark === '.' || Number(first) > 12 || (order === 'day_first' && Number(second) <= 12);
    const [day, month] = dayFirst ? [first, second] : [second, first];
    return calendarDay(fullYear(year), Number(month), Number(day));
  }
  return worded(text);
}

/** "14 June 2026", "Sunday, June 14th, 2026", "1er juin 2026", "14 de junio de 2026", "14-Jun-26". */
function worded(text: string): Temporal.PlainDate | null {
  let month: number | null = null;
  const numbers: string[] = [];
  for (const word of plainly(text).split(' ')) {
    const known = MONTH_OF.get(word);
    const number = /^(\d{1,4})(?:st|nd|rd|th|er|o|a)?$/.exec(word)?.[1];
    if (known !== undefined && month === null) month = known;
    else if (number !== undefined) numbers.push(number);
  }
  const [day = '', year = '', more] = numbers;
  if (month === null || more !== undefined || day.length > 2 || year.length % 2 !== 0 || year === '')
    return null;
  return calendarDay(fullYear(year), month, Number(day));
}

const fullYear = (text: string): number => (text.length === 2 ? 2000 + Number(text) : Number(text));

function calendarDay(year: number, month: number, day: number): Temporal.PlainDate | null {
  if (year < 2000 || year > 2099) return null;
  try {
    return Temporal.PlainDate.from({ year, month, day }, { overflow: 'reject' });
  } catch {
    return null;
  }
}
