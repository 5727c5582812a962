import { describe, expect, test } from 'vitest';
import { type Aboard, type ReadList, readGuestList } from '../../../shared/rules/guestList.ts';

const ABOARD: Aboard = {
  cabins: [
    { id: 'c1', name: 'Cabin 1' },
    { id: 'c2', name: 'Cabin 2' },
    { id: 'master', name: "Owner's suite" },
    { id: 'etoile', name: 'Étoile' },
  ],
  zones: [{ zone: 'Europe/Zagreb', fromAt: new Date('2020-01-01T00:00:00Z') }],
  dateOrder: null,
};

function read(text: string, more: Partial<Aboard> = {}): ReadList {
  const list = readGuestList(text, { ...ABOARD, ...more });
  if (typeof list === 'string') throw new Error(list);
  return list;
}

const at = (list: ReadList, index: number) => {
  const row = list.rows[index];
  if (!row) throw new Error(`no row ${index}`);
  return row;
};

describe('a list in the form it comes in (common practice, no source)', () => {
  test.each([
    ['commas', ','],
    ['semicolons', ';'],
    ['tabs', '\t'],
    ['bars', '|'],
  ])('%s', (_name, mark) => {
    const list = read(
      `${['Name', 'Cabin', 'Language'].join(mark)}\n${['Anna Brandt', '1', 'it'].join(mark)}`,
    );
    expect(at(list, 0)).toMatchObject({ line: 2, name: 'Anna Brandt', cabinId: 'c1', language: 'it' });
    expect(list.wrong).toEqual([]);
  });

  test.each([
    ['English', 'Guest;Cabin;Language;Under 16;From;Until', 'Anna;1;Italian;yes;14 June 2026;21 June 2026'],
    [
      'French',
      'Nom complet;Cabine;Langue;Moins de 16 ans;Arrivée;Départ',
      'Anna;1;italien;oui;14 juin 2026;21 juin 2026',
    ],
    [
      'Italian',
      'Nominativo;Cabina;Lingua;Sotto i 16 anni;Dal;Al',
      'Anna;1;italiano;sì;14 giugno 2026;21 giugno 2026',
    ],
    [
      'Spanish',
      'Nombre completo;Camarote;Idioma;Menor de 16 años;Llegada;Salida',
      'Anna;1;italiano;sí;14 de junio de 2026;21 de junio de 2026',
    ],
    [
      'German',
      'Gast;Kabine;Sprache;Unter 16;Anreise;Abreise',
      'Anna;1;Italienisch;ja;14. Juni 2026;21. Juni 2026',
    ],
  ])('headings and words in %s', (_name, heading, line) => {
    const list = read(`${heading}\n${line}`);
    expect(list.wrong).toEqual([]);
    expect(at(list, 0)).toMatchObject({
      name: 'Anna',
      cabinId: 'c1',
      language: 'it',
      under16: true,
      // 12:00 and 23:59 in Zagreb's summer, UTC+2
      fromAt: new Date('2026-06-14T10:00:00Z'),
      untilAt: new Date('2026-06-21T21:59:00Z'),
    });
    expect(list.leftOut).toBe(0);
  });

  test.each([
    ['Family name,Given names', 'BRANDT,Anna Maria', 'Anna Maria BRANDT'],
    ['Nom,Prénom', 'Brandt,Anna', 'Anna Brandt'],
    ['Cognome,Nome', 'Brandt,Anna', 'Anna Brandt'],
    ['Nombre,Apellidos', 'Anna,Brandt Vela', 'Anna Brandt Vela'],
    ['Name,Vorname', 'Brandt,Anna', 'Anna Brandt'],
    ['7 Family name,8 Given names', 'Brandt,Anna', 'Anna Brandt'],
    ['"Family name, given names"', '"Brandt, Anna"', 'Brandt, Anna'],
  ])('names from %s', (heading, line, name) => {
    expect(at(read(`${heading}\n${line}`), 0).name).toBe(name);
  });

  test('a passenger list (IMO FAL form 6, FAL Convention appendix 1) gives names and nothing of documents or births', () => {
    const heading =
      'Family name,Given names,Nationality,Date of birth,Place of birth,Gender,Type of identity or travel document,Serial number of identity or travel document,Port of embarkation,Port of disembarkation';
    const list = read(`${heading}\nBRANDT,Anna,HR,1988-02-03,Split,F,Passport,K8842913,HRSPU,HRDBV`);
    expect(at(list, 0).name).toBe('Anna BRANDT');
    expect(list.leftOut).toBe(8);
    expect(JSON.stringify(list)).not.toMatch(/K8842913|1988|Passport|HRSPU/);
  });

  test('titles, blank lines and the heading once more are passed over; lines keep their numbers', () => {
    const list = read('Halloran party\r\n\r\nName,Cabin\r\nAnna,1\r\n,\r\nName,Cabin\r\nBen,2\r\n');
    expect(list.rows.map(({ line, name }) => [line, name])).toEqual([
      [4, 'Anna'],
      [7, 'Ben'],
    ]);
  });

  test('commas inside cells do not beat the semicolons between them', () => {
    expect(at(read('Name;Cabin\nBrandt, Anna;1\nVela, Ben;2'), 1)).toMatchObject({
      name: 'Vela, Ben',
      cabinId: 'c2',
    });
  });

  test('a line break inside quotes is part of the cell (RFC 4180 section 2), and counts as a line', () => {
    const list = read('Name,Cabin\n"Anna\nBrandt",1\n"She said ""Ben""",2\nMia,9');
    expect(list.rows.map(({ line, name }) => [line, name])).toEqual([
      [2, 'Anna Brandt'],
      [4, 'She said "Ben"'],
      [5, 'Mia'],
    ]);
  });

  test.each([
    ['cabin 1', 'c1'],
    ['CABIN 1', 'c1'],
    ['1', 'c1'],
    ['Cabine n° 2', 'c2'],
    ['etoile', 'etoile'],
    ['owner’s suite', 'master'],
    ['3', null],
    ['', null],
  ])('the cabin %j', (cell, cabin) => {
    const row = at(read(`Name,Cabin\nAnna,${cell}`), 0);
    expect(row.cabinId).toBe(cabin);
    expect(row.notes).toHaveLength(cabin === null && cell !== '' ? 1 : 0);
  });

  test.each([
    ['it', 'it'],
    ['IT', 'it'],
    ['it-IT', 'it'],
    ['Français', 'fr'],
    ['Deutsch', 'de'],
    ['Español', 'es'],
    ['Ελληνικά', 'el'],
    ['Русский', 'ru'],
    ['日本語', 'ja'],
    ['Italian / English', 'it'],
    ['', 'en'],
  ])('the language %j', (cell, language) => {
    const row = at(read(`Name,Language\nAnna,${cell}`), 0);
    expect([row.language, row.notes]).toEqual([language, []]);
  });

  test('a language that is not known costs a note, not the line', () => {
    const row = at(read('Name,Language\nAnna,Quenya'), 0);
    expect(row.language).toBe('en');
    expect(row.notes).toEqual(['The language “Quenya” is not known here; the card will be in English.']);
  });

  test.each([
    ['Under 16', 'yes', true],
    ['Under 16', 'X', true],
    ['Under 16', '✓', true],
    ['Under 16', 'no', false],
    ['Under 16', '', false],
    ['Under 16', '-', false],
    ['Under 16', '12', true],
    ['Under 16', '34', false],
    ['Age', '15', true],
    ['Age', '16', false],
    ['Age', '9 yrs', true],
    ['Età', '41', false],
  ])('under 16 by %s %j', (heading, cell, answer) => {
    expect(at(read(`Name,${heading}\nAnna,${cell}`), 0).under16).toBe(answer);
  });

  test('a name that is withheld is none', () => {
    expect(at(read('Name,Cabin\nWithheld,1'), 0)).toMatchObject({ name: null, cabinId: 'c1' });
  });
});

describe('dates', () => {
  const from = (cell: string, more: Partial<Aboard> = {}) =>
    at(read(`Name;From\nAnna;${cell}`, more), 0).fromAt;

  test.each([
    '2026-06-14 15:00',
    '2026-06-14T15:00',
    '2026/06/14 15:00',
    '2026-06-14T13:00:00Z',
    '2026-06-14T15:00+02:00',
    '14/06/2026 15:00',
    '14.06.2026 15.00',
    '14.6.26, 15:00',
    '14-06-2026 15h00',
    '14 June 2026 3 pm',
    'Sunday, June 14th, 2026 3:00 pm',
    '14-Jun-26 15:00',
    '14 juin 2026 à 15h',
    '14. Juni 2026 um 15 Uhr',
    '14 de junio de 2026 a las 15:00',
  ])('%s is 15:00 in Zagreb', (cell) => {
    expect(from(cell)).toEqual(new Date('2026-06-14T13:00:00Z'));
  });

  test('day and month are told over the column: one date above the 12th decides for all', () => {
    const day = read('Name,From,Until\nAnna,03/04/2026,05/04/2026\nBen,04/04/2026,25/04/2026');
    expect(day.dates).toBe('day_first');
    expect(at(day, 0).fromAt).toEqual(new Date('2026-04-03T10:00:00Z'));
    const month = read('Name,From,Until\nAnna,03/04/2026,03/06/2026\nBen,03/04/2026,04/25/2026');
    expect(month.dates).toBe('month_first');
    expect(at(month, 0).fromAt).toEqual(new Date('2026-03-04T11:00:00Z'));
  });

  test('a list that does not say is asked about, and the answer counts', () => {
    expect(read('Name,From\nAnna,03/04/2026').dates).toBe('ask');
    expect(read('Name,From\nAnna,03/03/2026').dates).toBeNull();
    const answered = read('Name,From\nAnna,03/04/2026', { dateOrder: 'month_first' });
    expect([answered.dates, at(answered, 0).fromAt]).toEqual([
      'month_first',
      new Date('2026-03-04T11:00:00Z'),
    ]);
  });

  test("the party's own day without a time means the party's time", () => {
    const party = { arrivesAt: new Date('2026-06-14T13:00:00Z'), leavesAt: new Date('2026-06-21T08:00:00Z') };
    const list = read('Name,From,Until\nAnna,2026-06-14,2026-06-21\nBen,2026-06-16,2026-06-21 07:00', {
      party,
    });
    expect(at(list, 0)).toMatchObject({ fromAt: null, untilAt: null });
    expect(at(list, 1)).toMatchObject({
      fromAt: new Date('2026-06-16T10:00:00Z'),
      untilAt: new Date('2026-06-21T05:00:00Z'),
    });
  });

  test.each([
    '31/02/2026',
    '2026-13-01',
    '14 June',
    'soon',
    '14/06/1926',
    '2026-06-14 25:00',
    '99/99/9999',
    '1'.repeat(60),
  ])('%s is no date', (cell) => {
    const list = read(`Name;From\nAnna;${cell}\nBen;2026-06-14`);
    expect(list.rows.map(({ name }) => name)).toEqual(['Ben']);
    expect(list.wrong).toMatchObject([{ line: 2, field: 'From' }]);
    expect(list.wrong[0]?.sentence).toContain('Write it like 14 June 2026');
  });
});

describe('a wrong line costs only itself', () => {
  test.each([
    ['an empty name', ',1,no', 'Name', 'The name is empty. Write the guest’s name, or “withheld”.'],
    ['neither yes nor no', 'Anna,1,perhaps', 'Under 16', '“perhaps” is neither yes nor no. Write yes or no.'],
    [
      'a name longer than it may be',
      `${'A'.repeat(121)},1,no`,
      'Name',
      'The name is longer than 120 characters. Shorten it.',
    ],
    [
      'a bell in a name',
      'An\u0007na,1,no',
      'Name',
      'The name holds a character that cannot be printed. Type it again.',
    ],
    [
      'a quote never closed',
      '"Anna,1,no',
      'Line',
      'A quotation mark is opened here and not closed. Close it, or leave it out.',
    ],
    [
      'text behind a closed quote',
      '"Anna"x,1,no',
      'Line',
      'A quotation mark is opened here and not closed. Close it, or leave it out.',
    ],
  ])('%s', (_name, line, field, sentence) => {
    const list = read(
      `Name,Cabin,Under 16\nMia,1,yes\n${line}\nBen,2,no\nZoe,2,no\nIda,2,no\nEva,2,no\nUma,2,no`,
    );
    expect(list.rows.map(({ name }) => name)).toEqual(['Mia', 'Ben', 'Zoe', 'Ida', 'Eva', 'Uma']);
    expect(list.wrong).toEqual([{ line: 3, field, sentence }]);
  });

  test('leaving before coming', () => {
    const list = read('Name,From,Until\nAnna,2026-06-20,2026-06-14');
    expect(list.wrong).toMatchObject([{ line: 2, field: 'Until' }]);
  });

  test('a line with more or fewer cells than headings', () => {
    const list = read('Name,Cabin,Language\nAnna\nBen,2,it,more,and more');
    expect(list.rows).toMatchObject([{ name: 'Anna' }, { name: 'Ben', language: 'it' }]);
  });

  test('the same name twice is said, and both stay', () => {
    const list = read('Name\nAnna\nanna');
    expect(at(list, 1).notes).toEqual(['The same name is on line 2 as well.']);
  });

  test('a list without headings, and one that is too long, are refused whole', () => {
    expect(readGuestList('Anna,1\nBen,2', ABOARD)).toContain('No line with headings was found.');
    expect(readGuestList('', ABOARD)).toContain('No line with headings was found.');
    expect(readGuestList(`Name\n${'Anna\n'.repeat(501)}`, ABOARD)).toContain('at most 500');
    expect(read(`Name\n${'Anna\n'.repeat(500)}`).rows).toHaveLength(500);
  });

  test.each([
    ['quotes', `Name\n${'"'.repeat(500_000)}`],
    ['quotes that open lines', `Name\n${'"a\n'.repeat(100_000)}`],
    ['separators', `Name${','.repeat(500_000)}`],
    ['spaces', `Name\n${' '.repeat(1_000_000)}x`],
    ['one long name', `Name\n${'a'.repeat(1_000_000)}`],
    ['digits as a date', `Name,From\nAnna,${'1/'.repeat(400_000)}`],
  ])('%s in their hundred thousands are read in a moment (R36)', (_name, text) => {
    // Processor time: what else runs on the machine is not the reader's doing.
    const before = process.cpuUsage();
    readGuestList(text, ABOARD);
    expect(process.cpuUsage(before).user / 1000).toBeLessThan(250);
  });
});

test.each([
  '=1+1',
  '+41 Anna',
  '-Anna',
  '@Anna',
  '＝Anna',
  "'Anna",
  "=cmd|' /C calc'!A0",
  '"Ann" O\'Neil',
  '=HYPERLINK("http://a.example";"x")',
])('the name %j is text and stays as it is (R40)', (name) => {
  expect(at(read(`Name;Cabin\n"${name.replaceAll('"', '""')}";1`), 0).name).toBe(name);
});
