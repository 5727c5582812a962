import { plainly } from './plainText.ts';

export interface KnownCabin {
  readonly id: string;
  readonly name: string;
}

const WORDS =
  /\b(?:the|cabin|stateroom|room|no|cabine|chambre|cabina|camera|camarote|habitacion|kabine|zimmer|nr|n)\b/g;

/** The vessel's cabin a cell names, whatever its case, accents and the word "cabin"; null unless exactly one fits. */
export function matchCabin(cell: string, cabins: readonly KnownCabin[]): string | null {
  const wanted = plainly(cell);
  if (wanted === '') return null;
  return (
    only(cabins.filter(({ name }) => plainly(name) === wanted)) ??
    only(cabins.filter(({ name }) => bare(name) !== '' && bare(name) === bare(cell)))
  );
}

const bare = (text: string): string => plainly(text).replace(WORDS, ' ').replace(/\s+/g, ' ').trim();

const only = (found: readonly KnownCabin[]): string | null =>
  found.length === 1 ? (found[0]?.id ?? null) : null;
