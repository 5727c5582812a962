import { placesOf } from './headings.ts';

/** One record of a list. */
export interface Line {
  /** Where it starts, counted from 1. */
  readonly line: number;
  readonly cells: readonly string[];
  /** True when a quotation mark is opened and not closed; then `cells` is empty. */
  readonly broken: boolean;
}

const SEPARATORS = [',', ';', '\t', '|'] as const;
/** A cell in quotes may hold this many line breaks; beyond it, a mark was forgotten. Common practice, no source. */
const QUOTED_LINES = 5;
/** Headings are looked for in this many lines that are not blank: titles come before them. */
const HEADING_WITHIN = 20;
/** Lines cut to look for the headings, and lines cut at all, blank ones with them: a list is short (500 guests). */
const LOOK_LINES = 60;
export const LINES_MAX = 5000;
const CELLS_MAX = 256;

/**
 * Cuts a list into lines and cells. Fields in quotes may hold separators, line breaks and doubled quotes (RFC 4180
 * section 2); a quote elsewhere is a character like any other. A quote that is never closed costs its own line.
 * Stops after `most` lines.
 */
export function cutCells(text: string, separator: string, most: number = LINES_MAX): Line[] {
  const lines: Line[] = [];
  let at = 0;
  let line = 1;
  while (at < text.length && lines.length < most) {
    const record = cutRecord(text, at, separator);
    if (record) {
      lines.push({ line, cells: record.cells, broken: false });
      at = record.end;
      line += record.breaks;
    } else {
      lines.push({ line, cells: [], broken: true });
      at = afterBreak(text, endOfLine(text, at));
      line += 1;
    }
  }
  return lines;
}

interface Cut {
  readonly cells: string[];
  /** Where the next record starts. */
  readonly end: number;
  /** Line breaks passed, with the one that ends the record. */
  readonly breaks: number;
}

function cutRecord(text: string, start: number, separator: string): Cut | null {
  const cells: string[] = [];
  let at = start;
  let breaks = 1;
  for (;;) {
    while (text[at] === ' ') at += 1;
    if (text[at] === '"') {
      const field = cutQuoted(text, at, separator);
      if (!field) return null;
      cells.push(field.cell);
      at = field.end;
      breaks += field.breaks;
    } else {
      const from = at;
      while (at < text.length && text[at] !== separator && text[at] !== '\n' && text[at] !== '\r') at += 1;
      cells.push(text.slice(from, at).trimEnd());
    }
    if (cells.length > CELLS_MAX) return null;
    if (text[at] !== separator) return { cells, end: afterBreak(text, at), breaks };
    at += 1;
  }
}

/** A field in quotes from its opening mark, or null when the mark is not closed properly. */
function cutQuoted(
  text: string,
  start: number,
  separator: string,
): { cell: string; end: number; breaks: number } | null {
  let cell = '';
  let breaks = 0;
  for (let at = start + 1; at < text.length; at += 1) {
    const sign = text[at];
    if (sign === '"' && text[at + 1] === '"') {
      cell += '"';
      at += 1;
    } else if (sign === '"') {
      let end = at + 1;
      while (text[end] === ' ') end += 1;
      const closes =
        end >= text.length || text[end] === separator || text[end] === '\n' || text[end] === '\r';
      return closes ? { cell, end, breaks } : null;
    } else {
      if (sign === '\n' || (sign === '\r' && text[at + 1] !== '\n')) breaks += 1;
      if (breaks > QUOTED_LINES) return null;
      cell += sign;
    }
  }
  return null;
}

function endOfLine(text: string, from: number): number {
  let at = from;
  while (at < text.length && text[at] !== '\n' && text[at] !== '\r') at += 1;
  return at;
}

const afterBreak = (text: string, at: number): number =>
  text[at] === '\r' && text[at + 1] === '\n' ? at + 2 : at + 1;

export const isBlank = ({ cells, broken }: Line): boolean =>
  !broken && cells.every((cell) => cell.trim() === '');

export interface Table {
  /** The line of headings, as written. */
  readonly headings: readonly string[];
  readonly lines: readonly Line[];
}

/** Finds the separator and the line of headings: those under which most columns are known. Null when there is none. */
export function findTable(text: string): Table | null {
  let best: { separator: string; headings: Line; known: number } | null = null;
  for (const separator of SEPARATORS) {
    const candidates = cutCells(text, separator, LOOK_LINES).filter((one) => !isBlank(one));
    for (const headings of candidates.slice(0, HEADING_WITHIN)) {
      const known = Object.keys(placesOf(headings.cells) ?? {}).length;
      if (known > (best?.known ?? 0)) best = { separator, headings, known };
    }
  }
  if (!best) return null;
  const { separator, headings } = best;
  const lines = cutCells(text, separator).filter(({ line }) => line > headings.line);
  return { headings: headings.cells, lines };
}
