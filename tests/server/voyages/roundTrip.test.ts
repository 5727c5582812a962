import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { csvText } from '../../../server/http/csv.ts';
import { decodeUpload } from '../../../server/voyages/decodeUpload.ts';
import { readGuestList } from '../../../shared/rules/guestList.ts';

const NO_BOAT = {
  cabins: [],
  zones: [{ zone: 'Europe/Zagreb', fromAt: new Date(0) }],
  dateOrder: null,
} as const;

/** One row after another, each field in quotes (RFC 4180 section 2), by a writer of our tests alone. */
const written = (rows: readonly (readonly string[])[], separator: string, end: string): string =>
  rows.map((row) => row.map((cell) => `"${cell.replaceAll('"', '""')}"`).join(separator) + end).join('');

type Encode = (text: string) => Buffer;
const utf16be: Encode = (text) => Buffer.from(`\ufeff${text}`, 'utf16le').swap16();
const ENCODINGS: Readonly<Record<string, Encode>> = {
  'UTF-8': (text) => Buffer.from(text, 'utf8'),
  'UTF-8 with its mark': (text) => Buffer.from(`\ufeff${text}`, 'utf8'),
  'UTF-16 little end first': (text) => Buffer.from(`\ufeff${text}`, 'utf16le'),
  'UTF-16 big end first': utf16be,
};

const LATIN = 'abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZàâçéèêëïôùûüäößñÅØø';
// Not in Latin-1: Greek, Cyrillic, Croatian, Turkish, Chinese, an emoji, right-to-left.
const WIDE = `${LATIN}ΑλέξηςЖанаčćđšžİıŁ王小明🙂אב`;
const SIGNS = ' \'",;|=+-@.()/&%#';

/** Names as lists hold them: trimmed, single spaces, something a person reads, and not a word for "withheld". */
const names = (letters: string) =>
  fc
    .array(fc.constantFrom(...letters, ...SIGNS), { minLength: 1, maxLength: 40 })
    .map((parts) => `Q${parts.join('')}z`.replace(/\s+/g, ' '));

const lists = (letters: string) =>
  fc.record({
    people: fc.array(names(letters), { minLength: 1, maxLength: 12 }),
    separator: fc.constantFrom(',', ';', '\t', '|'),
    end: fc.constantFrom('\n', '\r\n', '\r'),
  });

function namesIn(bytes: Buffer): (string | null)[] {
  const list = readGuestList(decodeUpload(bytes).text, NO_BOAT);
  if (typeof list === 'string') throw new Error(list);
  expect(list.wrong).toEqual([]);
  return list.rows.map(({ name }) => name);
}

describe('what a spreadsheet writes is what is read, letter by letter', () => {
  test.each(Object.entries(ENCODINGS))('%s, by each separator and line end', (_name, encode) => {
    fc.assert(
      fc.property(lists(WIDE), ({ people, separator, end }) => {
        const rows = [['Name', 'Cabin'], ...people.map((name) => [name, ''])];
        expect(namesIn(encode(written(rows, separator, end)))).toEqual(people);
      }),
      { numRuns: 150 },
    );
  });

  test('Windows-1252, where the letters are in it', () => {
    fc.assert(
      fc.property(lists(LATIN), ({ people, separator, end }) => {
        const rows = [['Name', 'Cabin'], ...people.map((name) => [name, ''])];
        // A letter above 0x7F somewhere, or the file is UTF-8 just as well.
        const bytes = Buffer.from(written([...rows, ['Zoë Ångström', '']], separator, end), 'latin1');
        expect(namesIn(bytes)).toEqual([...people, 'Zoë Ångström']);
      }),
      { numRuns: 150 },
    );
  });

  test('R40: our own export of the same names, apostrophes before formulas included, gives them back', () => {
    const begins = fc.constantFrom('=', '+', '-', '@', '＝', ' =', '"=', "'=", '');
    fc.assert(
      fc.property(fc.array(fc.tuple(begins, names(WIDE)), { minLength: 1, maxLength: 12 }), (given) => {
        const people = given.map(([begin, name]) => `${begin}${name}`.trim());
        const text = csvText(
          ['Name', 'Cabin'],
          people.map((name) => [name, null]),
        );
        expect(namesIn(Buffer.from(text, 'utf8'))).toEqual(people);
      }),
      { numRuns: 300 },
    );
  });

  test('any octets at all give a list or a clear refusal, and quickly (R36, R38)', () => {
    fc.assert(
      fc.property(fc.uint8Array({ maxLength: 4000 }), (octets) => {
        const before = process.cpuUsage();
        try {
          readGuestList(decodeUpload(Buffer.from(octets)).text, NO_BOAT);
        } catch (error) {
          expect(error).toMatchObject({ code: 'invalid' });
        }
        expect(process.cpuUsage(before).user / 1000).toBeLessThan(1000);
      }),
      { numRuns: 300 },
    );
  });

  test.each([
    ['quotes', '"'.repeat(50_000)],
    ['separators', ',;|\t'.repeat(12_500)],
    ['spaces', ' '.repeat(50_000)],
    ['figures', '1'.repeat(50_000)],
    ['dots', '14.'.repeat(16_000)],
    ['letters', 'a'.repeat(50_000)],
  ])('R36: a cell of 50,000 %s is put aside in less than a second of processor time', (_what, cell) => {
    const before = process.cpuUsage();
    for (const heading of ['Name', 'Cabin', 'Language', 'Under 16', 'Age', 'From', 'Until']) {
      const head = heading === 'Name' ? 'Name' : `Name;${heading}`;
      const line = heading === 'Name' ? cell : `Ben Vela;${cell}`;
      readGuestList(`${head}\n${line}\nSigrun Brandvold;\n`, NO_BOAT);
    }
    expect(process.cpuUsage(before).user / 1000).toBeLessThan(1000);
  });
});
