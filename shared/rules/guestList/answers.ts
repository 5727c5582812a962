import { plainly } from './plainText.ts';

const YES = new Set(
  'yes|y|true|1|x|oui|o|vrai|si|s|vero|verdadero|ja|j|wahr|child|enfant|bambino|nino|kind|minor'.split('|'),
);
const NO = new Set('no|n|false|0|non|faux|falso|nein|falsch|adult|adulte|adulto|erwachsen'.split('|'));
const TICKS = new Set(['✓', '✔', '☑']);
/** The list's own question, in years. */
const AGE = 16;
const OLDEST = 120;

/** Whether a cell says that somebody is under 16: yes, no, a tick, or an age in years. Null when it says neither. */
export function under16Of(text: string): boolean | null {
  const cell = text.trim();
  if (cell === '' || /^[-–—]$/.test(cell)) return false;
  if (TICKS.has(cell)) return true;
  const word = plainly(cell);
  if (YES.has(word)) return true;
  if (NO.has(word)) return false;
  return underAge(cell);
}

/** Whether an age in years is under 16; false for an empty cell, null for anything that is no age. */
export function underAge(text: string): boolean | null {
  if (text.trim() === '') return false;
  const years = /^(\d{1,3})(?:\s*\p{L}{1,6}\.?)?$/u.exec(text.trim())?.[1];
  if (years === undefined || Number(years) > OLDEST) return null;
  return Number(years) < AGE;
}

const WITHHELD = new Set(
  'withheld|private|anonymous|confidential|no name|name withheld|anonyme|confidentiel|riservato|anonimo|reservado|confidencial|anonym|vertraulich'.split(
    '|',
  ),
);

/** True where a list says that somebody's name is not to be written down. */
export const isWithheld = (text: string): boolean => WITHHELD.has(plainly(text));
