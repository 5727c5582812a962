import { parse } from 'csv-parse/sync';
import { describe, expect, test } from 'vitest';
import { csvText } from '../../../server/http/csv.ts';

describe('CSV', () => {
  test('quotes as RFC 4180 section 2 asks, read back by another program', () => {
    const cells = ['plain', 'a, b', 'she said "no"', 'two\nlines', 'two\r\nlines', '', 'Korčula'];
    const text = csvText(['one', 'two', 'three', 'four', 'five', 'six', 'seven'], [cells]);
    expect(text.startsWith('\ufeffone,two,')).toBe(true);
    expect(text.endsWith('\r\n')).toBe(true);
    const read = parse(text, { bom: true, record_delimiter: '\r\n' }) as string[][];
    expect(read[1]).toEqual(cells);
  });

  test.each([
    '=1+1',
    '+1',
    '-1',
    '@SUM(A1)',
    '\t=1',
    '\r=1',
    '\n=1',
    '＝1',
    '  =1',
    '"=1',
    "'=1",
    "=cmd|' /C calc'!A0",
  ])('R40: %j cannot become a formula', (cell) => {
    const [row] = parse(csvText(['a'], [[cell]]), {
      bom: true,
      from_line: 2,
      record_delimiter: '\r\n',
    }) as string[][];
    expect(row).toEqual([`'${cell}`]);
  });

  test('figures and empty cells stay as they are', () => {
    expect(csvText(['a', 'b', 'c'], [[-3, null, 4.5]])).toBe('\ufeffa,b,c\r\n-3,,4.5\r\n');
  });
});
