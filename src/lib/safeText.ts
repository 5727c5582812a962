/** A stretch of text as typed, or the name of a control character that stands in its place. */
export type TextPiece = { kind: 'text'; text: string } | { kind: 'mark'; name: string };

/**
 * Characters that turn the reading direction or print nothing, and the short names Unicode gives them
 * (Unicode Standard Annex 9, section 2, and the Unicode names list). Joiners (U+200C, U+200D) stay as they are:
 * Persian names and emoji need them.
 */
const NAMES = new Map<number, string>([
  [0x061c, 'ALM'],
  [0x200b, 'ZWSP'],
  [0x200e, 'LRM'],
  [0x200f, 'RLM'],
  [0x202a, 'LRE'],
  [0x202b, 'RLE'],
  [0x202c, 'PDF'],
  [0x202d, 'LRO'],
  [0x202e, 'RLO'],
  [0x2028, 'LS'],
  [0x2029, 'PS'],
  [0x2060, 'WJ'],
  [0x2066, 'LRI'],
  [0x2067, 'RLI'],
  [0x2068, 'FSI'],
  [0x2069, 'PDI'],
  [0xfeff, 'BOM'],
]);

function nameOf(code: number): string | undefined {
  const known = NAMES.get(code);
  if (known) return known;
  const isControl =
    (code < 0x20 && code !== 0x0a && code !== 0x0d && code !== 0x09) || (code >= 0x7f && code < 0xa0);
  return isControl ? `U+${code.toString(16).toUpperCase().padStart(4, '0')}` : undefined;
}

/** Splits a text somebody typed so that each control character can be shown as a visible mark (R33). */
export function visiblePieces(text: string): TextPiece[] {
  const pieces: TextPiece[] = [];
  let run = '';
  for (const character of text) {
    const name = nameOf(character.codePointAt(0) ?? 0);
    if (name === undefined) {
      run += character;
      continue;
    }
    if (run) pieces.push({ kind: 'text', text: run });
    run = '';
    pieces.push({ kind: 'mark', name });
  }
  if (run) pieces.push({ kind: 'text', text: run });
  return pieces;
}

/** The same as one string, for titles and labels that cannot hold elements: "Ada⟨RLO⟩". */
export function visibleText(text: string): string {
  return visiblePieces(text)
    .map((piece) => (piece.kind === 'text' ? piece.text : `⟨${piece.name}⟩`))
    .join('');
}
