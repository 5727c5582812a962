/** One cell: text as it is known, a figure, or nothing. */
export type CsvCell = string | number | null;

/**
 * Rows as CSV: fields separated by commas, lines ended by CR LF, a field with a comma, quote or line break in
 * quotes with its quotes doubled (RFC 4180 section 2). A text that a spreadsheet would take for a formula gets
 * an apostrophe before it, also behind spaces, quotes and in full-width signs (OWASP, CSV injection); figures
 * are written as they are. Begins with a byte order mark, without which common spreadsheets misread accents.
 */
export function csvText(heading: readonly string[], rows: readonly (readonly CsvCell[])[]): string {
  return `\ufeff${[heading, ...rows].map((row) => `${row.map(field).join(',')}\r\n`).join('')}`;
}

// Tab, carriage return and line feed start a formula in some programs as well.
const FORMULA = /^[\s'"]*[=+\-@\uff1d\uff0b\uff0d\uff20]|^[\t\r\n]/u;

function field(cell: CsvCell): string {
  if (cell === null) return '';
  if (typeof cell === 'number') return String(cell);
  const safe = FORMULA.test(cell) ? `'${cell}` : cell;
  return /[",\r\n]/.test(safe) ? `"${safe.replaceAll('"', '""')}"` : safe;
}
