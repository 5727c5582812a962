import { Temporal } from 'temporal-polyfill';
import type { Language } from '../api/common.ts';
import { isWithheld, under16Of, underAge } from './guestList/answers.ts';
import { type KnownCabin, matchCabin } from './guestList/cabins.ts';
import { findTable, isBlank, type Line } from './guestList/cells.ts';
import { momentOf, type Order, orderOf } from './guestList/dates.ts';
import { COLUMN_WORDS, type Column, type Places, placesOf } from './guestList/headings.ts';
import { languageOf } from './guestList/languages.ts';
import { quoted } from './guestList/plainText.ts';
import { CSV_MAX_ROWS, NAME_MAX } from './limits.ts';
import { isPlainLine } from './plainLine.ts';
import { shipInstant, shipTime, type ZoneSpan } from './shipTime.ts';

/** One guest as a list gives them. Null times are the party's. */
export interface ListedGuest {
  /** Counted from 1, headings included. */
  readonly line: number;
  /** Null when the list says it is withheld. */
  readonly name: string | null;
  readonly cabinId: string | null;
  readonly language: Language;
  readonly under16: boolean;
  readonly fromAt: Date | null;
  readonly untilAt: Date | null;
  /** What a person should look at, as sentences. */
  readonly notes: readonly string[];
}

/** A line that is left out, with the field and what would be right. */
export interface WrongLine {
  readonly line: number;
  readonly field: string;
  readonly sentence: string;
}

export interface ReadList {
  readonly rows: readonly ListedGuest[];
  readonly wrong: readonly WrongLine[];
  /** What the used columns were taken for, in their order. */
  readonly columns: readonly string[];
  /** How many columns were not used: passports, births and whatever else; nothing of them is kept. */
  readonly leftOut: number;
  readonly dates: Order | 'ask' | null;
}

export interface Aboard {
  readonly cabins: readonly KnownCabin[];
  readonly zones: readonly ZoneSpan[];
  /** A person's answer where the list does not say which of day and month comes first. */
  readonly dateOrder: Order | null;
  /** The party's own times: its days, given without a time of day, mean these. */
  readonly party?: { readonly arrivesAt: Date; readonly leavesAt: Date } | null;
}

/**
 * Reads a party's list: separators, headings and date forms as they come. A wrong line costs only itself. Answers a
 * sentence instead where no line of headings can be found or there are too many lines.
 */
export function readGuestList(text: string, aboard: Aboard): ReadList | string {
  const table = findTable(text);
  if (!table) {
    return 'No line with headings was found. Let the first line name the columns, for example: Name, Cabin, Language, Under 16, From, Until.';
  }
  const places = placesOf(table.headings) ?? {};
  const again = table.headings.map((cell) => cell.trim()).join('\n');
  const lines = table.lines.filter(
    (line) => !isBlank(line) && line.cells.map((cell) => cell.trim()).join('\n') !== again,
  );
  if (lines.length > CSV_MAX_ROWS) {
    return `The list has ${lines.length} lines, and at most ${CSV_MAX_ROWS} are taken at a time. Cut it in two.`;
  }
  const told = orderOf(
    lines.flatMap((line) => [cellOf(line, places, 'from'), cellOf(line, places, 'until')]),
  );
  const order = aboard.dateOrder ?? (told === 'month_first' ? 'month_first' : 'day_first');
  const rows: ListedGuest[] = [];
  const wrong: WrongLine[] = [];
  for (const line of lines) {
    const read = readLine(line, places, { ...aboard, order });
    if ('sentence' in read) wrong.push(read);
    else rows.push(read);
  }
  const used = Object.entries(places).sort(([, one], [, other]) => one - other);
  return {
    rows: withTwins(rows),
    wrong,
    columns: used.map(([column]) => COLUMN_WORDS[column as Column]),
    leftOut: table.headings.filter((cell) => cell.trim() !== '').length - used.length,
    dates: told === 'ask' && aboard.dateOrder ? aboard.dateOrder : told,
  };
}

const cellOf = (line: Line, places: Places, column: Column): string => {
  const at = places[column];
  return at === undefined ? '' : (line.cells[at] ?? '').trim();
};

function readLine(
  line: Line,
  places: Places,
  aboard: Aboard & { readonly order: Order },
): ListedGuest | WrongLine {
  const refuse = (column: Column | null, sentence: string): WrongLine => ({
    line: line.line,
    field: column ? COLUMN_WORDS[column] : 'Line',
    sentence,
  });
  if (line.broken)
    return refuse(null, 'A quotation mark is opened here and not closed. Close it, or leave it out.');
  const cell = (column: Column) => cellOf(line, places, column);
  const notes: string[] = [];

  const name = nameOf(line, places);
  const nameColumn: Column = places.name === undefined ? 'familyName' : 'name';
  if (name === '') return refuse(nameColumn, 'The name is empty. Write the guest’s name, or “withheld”.');
  if (!isPlainLine(name))
    return refuse(nameColumn, 'The name holds a character that cannot be printed. Type it again.');
  if (name.length > NAME_MAX)
    return refuse(nameColumn, `The name is longer than ${NAME_MAX} characters. Shorten it.`);

  const under16 = cell('under16') !== '' ? under16Of(cell('under16')) : underAge(cell('age'));
  if (under16 === null) {
    return cell('under16') !== ''
      ? refuse('under16', `${quoted(cell('under16'))} is neither yes nor no. Write yes or no.`)
      : refuse('age', `${quoted(cell('age'))} is no age. Write the years, for example 12.`);
  }
  const from = whenOf(cell('from'), aboard, 'arrivesAt');
  if (from === undefined) return refuse('from', dateSentence(cell('from')));
  const until = whenOf(cell('until'), aboard, 'leavesAt');
  if (until === undefined) return refuse('until', dateSentence(cell('until')));
  if (from && until && until.getTime() <= from.getTime())
    return refuse('until', 'This must be later than the time the guest comes aboard.');

  const spoken = cell('language');
  const language = spoken === '' ? 'en' : languageOf(spoken);
  if (language === null)
    notes.push(`The language ${quoted(spoken)} is not known here; the card will be in English.`);
  const cabin = matchCabin(cell('cabin'), aboard.cabins);
  if (cabin === null && cell('cabin') !== '')
    notes.push(
      `The cabin ${quoted(cell('cabin'))} is not one of this vessel’s. Choose it here, or place the guest later.`,
    );
  const withheld = isWithheld(name);
  if (withheld) notes.push('The name is withheld; the guest is shown by a number.');
  return {
    line: line.line,
    name: withheld ? null : name,
    cabinId: cabin,
    language: language ?? 'en',
    under16,
    fromAt: from,
    untilAt: until,
    notes,
  };
}

/** Given names before the family name; line breaks inside a cell are spaces. What remains is kept letter by letter. */
function nameOf(line: Line, places: Places): string {
  const parts =
    places.name === undefined
      ? [cellOf(line, places, 'givenName'), cellOf(line, places, 'familyName')]
      : [cellOf(line, places, 'name')];
  return parts
    .map((part) => exported(part.replace(/[\r\n\t]+/g, ' ').trim()))
    .filter((part) => part !== '')
    .join(' ');
}

// Our exports put an apostrophe before what a spreadsheet would take for a formula; coming back, it goes.
const exported = (text: string): string =>
  /^'[\s'"]*[=+\-@\uff1d\uff0b\uff0d\uff20]/u.test(text) ? text.slice(1) : text;

/**
 * Null where nothing is said or the party's own day is meant, undefined where it cannot be read. Another day without
 * a time is noon for coming aboard and the day's end for leaving, ship's time (common practice, no source).
 */
function whenOf(
  cell: string,
  aboard: Aboard & { readonly order: Order },
  edge: 'arrivesAt' | 'leavesAt',
): Date | null | undefined {
  if (cell === '' || /^[-–—]$/.test(cell)) return null;
  const moment = momentOf(cell, aboard.order);
  if (!moment) return undefined;
  if (moment.instant) return moment.instant;
  const { date, time } = moment;
  const own = aboard.party && shipTime(aboard.zones, aboard.party[edge]).toPlainDate();
  if (!time && own?.equals(date)) return null;
  const without = edge === 'arrivesAt' ? new Temporal.PlainTime(12) : new Temporal.PlainTime(23, 59);
  return shipInstant(aboard.zones, date.toPlainDateTime(time ?? without));
}

const dateSentence = (cell: string): string =>
  `${quoted(cell)} is no date that can be read. Write it like 14 June 2026 or 2026-06-14, with a time if you like: 15:00.`;

function withTwins(rows: readonly ListedGuest[]): ListedGuest[] {
  const first = new Map<string, number>();
  return rows.map((row) => {
    const key = row.name?.toLowerCase() ?? '';
    const known = key === '' ? undefined : first.get(key);
    if (known === undefined) {
      if (key !== '') first.set(key, row.line);
      return row;
    }
    return { ...row, notes: [...row.notes, `The same name is on line ${known} as well.`] };
  });
}
