import type { ListedPlace } from './queries.ts';

/** A line of the editor; `key` tells lines apart while their names change. */
export interface PlaceRow extends ListedPlace {
  key: string;
}

let made = 0;

/** Lines of the editor from what is stored. */
export const rowsOf = (places: readonly { id: string; name: string; deck: string | null }[]): PlaceRow[] =>
  places.map(({ id, name, deck }) => ({ key: id, id, name, deck: deck ?? '' }));

/** A new, empty line below the others, on the deck of the last one. */
export function withNew(rows: readonly PlaceRow[]): { rows: PlaceRow[]; key: string } {
  made += 1;
  const key = `new-${made}`;
  return { rows: [...rows, { key, deck: rows.at(-1)?.deck ?? '', name: '' }], key };
}

/** The line at `index` moved by one, up (-1) or down (1); the same lines when it stands at the end already. */
export function moved(rows: readonly PlaceRow[], index: number, step: -1 | 1): PlaceRow[] {
  const [row, other] = [rows[index], rows[index + step]];
  const after = [...rows];
  if (row && other) {
    after[index] = other;
    after[index + step] = row;
  }
  return after;
}

/** What is sent: without the editor's own keys. */
export const placesOf = (rows: readonly PlaceRow[]): ListedPlace[] =>
  rows.map(({ id, deck, name }) => (id === undefined ? { deck, name } : { id, deck, name }));

/** Names by deck, decks in the order in which they first stand. */
export function byDeck(
  places: readonly { name: string; deck: string | null }[],
): { deck: string; names: string[] }[] {
  const decks = new Map<string, string[]>();
  for (const { deck, name } of places) {
    const names = decks.get(deck ?? '') ?? [];
    names.push(name);
    decks.set(deck ?? '', names);
  }
  return [...decks].map(([deck, names]) => ({ deck, names }));
}
