import type { Fitted } from './fit.ts';
import { missingCharacters } from './fonts.ts';

/** What on the card cannot be printed. */
export type CardField =
  | 'vessel name'
  | 'network name'
  | 'password'
  | 'guest name'
  | 'cabin'
  | 'serial'
  | 'welcome line'
  | 'valid-from line'
  | 'printed wording';

/**
 * Thrown before any byte of a file exists, so that no card with empty boxes or clipped text is
 * handed to anybody. The message is fit for a screen and never holds any part of a passphrase.
 */
export class UnprintableText extends Error {
  override readonly name = 'UnprintableText';
  readonly field: CardField;
  /** The characters no font here has, each once; empty when the text is too long instead. */
  readonly characters: readonly string[];

  constructor(field: CardField, characters: readonly string[]) {
    super(sentence(field, characters));
    this.field = field;
    this.characters = field === 'password' ? [] : characters;
  }
}

function sentence(field: CardField, characters: readonly string[]): string {
  if (characters.length === 0) {
    return `The ${field} is too long for this card. Shorten it, or use a larger card.`;
  }
  if (field === 'password') {
    return 'The password holds a character that cannot be printed on a card. Use letters, figures and signs of a plain keyboard.';
  }
  const named = characters.slice(0, 5).map(describe).join(', ');
  const more = characters.length > 5 ? ` and ${characters.length - 5} more` : '';
  return `The ${field} cannot be printed: the card's fonts lack ${named}${more}. Write it with Latin, Greek or Cyrillic letters, or show the code on the screen instead.`;
}

/** A visible character and its code point; the code point alone for one that cannot be seen. */
function describe(character: string): string {
  const code = `U+${(character.codePointAt(0) ?? 0).toString(16).toUpperCase().padStart(4, '0')}`;
  return /[\p{C}\p{M}\p{Z}]/u.test(character) ? code : `${character} (${code})`;
}

/**
 * The text as it will stand on the card: in Unicode's composed form (NFC), since letters and
 * accents are not joined while printing.
 * @throws UnprintableText naming what the fonts lack, control characters and line breaks included.
 */
export function printable(field: CardField, text: string): string {
  const composed = text.normalize('NFC');
  const missing = missingCharacters(composed);
  if (missing.length > 0) throw new UnprintableText(field, missing);
  return composed;
}

/** @throws UnprintableText when the text fitted at no allowed size. */
export function must(field: CardField, fitted: Fitted | null): Fitted {
  if (fitted === null) throw new UnprintableText(field, []);
  return fitted;
}
