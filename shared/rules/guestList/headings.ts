import { plainly } from './plainText.ts';

export type Column =
  | 'name'
  | 'familyName'
  | 'givenName'
  | 'cabin'
  | 'language'
  | 'under16'
  | 'age'
  | 'from'
  | 'until';

/** What a column is called on screens. */
export const COLUMN_WORDS: Record<Column, string> = {
  name: 'Name',
  familyName: 'Family name',
  givenName: 'Given names',
  cabin: 'Cabin',
  language: 'Language',
  under16: 'Under 16',
  age: 'Age',
  from: 'From',
  until: 'Until',
};

/**
 * Headings as lists carry them in English, French, Italian, Spanish and German, and those of IMO FAL form 6
 * (FAL Convention, appendix 1): "Family name", "Given names". Common practice, no source, for the rest.
 */
const HEADINGS: Record<Column, string> = {
  name: `name|names|guest|guests|guest name|guest names|full name|passenger|passenger name|family name given names
    |nom|nom complet|nom et prenom|nom prenom|nom de l invite|nom du passager|invite|passager
    |nome|nome e cognome|nome cognome|cognome e nome|nome completo|nominativo|ospite|passeggero
    |nombre|nombre completo|nombre y apellido|nombre y apellidos|huesped|invitado|pasajero
    |vor und nachname|vorname und nachname|vollstandiger name|name des gastes|gast|gaste|passagier`,
  familyName: `family name|family names|surname|last name|lastname|nom de famille|cognome|cognomi|apellido|apellidos
    |nachname|familienname`,
  givenName: `given name|given names|first name|first names|firstname|forename|forenames|prenom|prenoms
    |nome di battesimo|nombre de pila|nombres|vorname|vornamen`,
  cabin: `cabin|cabin name|cabin no|cabin number|room|stateroom|suite|cabine|no de cabine|numero de cabine|chambre
    |cabina|numero cabina|camera|numero de cabina|camarote|habitacion|kabine|kabinennummer|kammer|zimmer`,
  language: `language|lang|preferred language|card language|languages|langue|langue parlee|langues|lingua|lingue
    |idioma|idiomas|lengua|sprache|sprachen`,
  under16: `under 16|under sixteen|under 16s|child|children|minor|kid|moins de 16|moins de 16 ans|enfant|mineur
    |sotto i 16|sotto i 16 anni|minore|minore di 16 anni|minorenne|bambino|menor|menor de 16|menor de 16 anos|nino
    |unter 16|unter 16 jahren|unter 16 jahre|kind|minderjahrig`,
  age: 'age|eta|edad|alter',
  from: `from|from date|start|start date|arrival|arrives|arriving|arrival date|date of arrival|joins|joining|boarding
    |embarks|embarkation|embarkation date|date of embarkation|check in|aboard from|du|de|des|arrivee|date d arrivee
    |debut|embarquement|date d embarquement|dal|da|arrivo|data di arrivo|data arrivo|imbarco|desde|llegada
    |fecha de llegada|embarque|von|ab|ankunft|anreise|ankunftsdatum|anreisedatum|einschiffung`,
  until: `until|until date|till|to|to date|end|end date|departure|departs|departing|departure date|date of departure|leaves
    |leaving|disembarks|disembarkation|disembarkation date|date of disembarkation|check out|aboard until|au|a|jusqu a
    |jusqu au|depart|date de depart|fin|debarquement|date de debarquement|al|fino al|fino a|partenza
    |data di partenza|data partenza|sbarco|hasta|salida|fecha de salida|desembarque|bis|abreise|abfahrt
    |abreisedatum|ausschiffung`,
};

const KNOWN = new Map(
  Object.entries(HEADINGS).flatMap(([column, words]) =>
    words.split('|').map((word): [string, Column] => [word.replace(/\s+/g, ' ').trim(), column as Column]),
  ),
);

/** The column a heading names, or null. Numbers before it and remarks in brackets do not count. */
export function columnOf(heading: string): Column | null {
  if (heading.length > 200) return null;
  const bare = plainly(heading.replace(/\([^)]*\)/g, ' ')).replace(/^\d+ (?=\p{L})/u, '');
  return KNOWN.get(bare) ?? null;
}

/** Where each column is; a heading that comes twice counts the first time. */
export type Places = Partial<Record<Column, number>>;

/**
 * The columns of a line of headings, or null when none of them is a name. "Nom" beside "Prénom" and "Name" beside
 * "Vorname" are family names, "Nome" beside "Cognome" and "Nombre" beside "Apellidos" given ones.
 */
export function placesOf(cells: readonly string[]): Places | null {
  const places: Places = {};
  for (const [index, cell] of cells.entries()) {
    const column = columnOf(cell);
    if (column !== null) places[column] ??= index;
  }
  const { name, familyName, givenName, ...rest } = places;
  if (name === undefined) return familyName === undefined && givenName === undefined ? null : places;
  if (givenName !== undefined && familyName === undefined) return { ...rest, familyName: name, givenName };
  if (familyName !== undefined && givenName === undefined) return { ...rest, familyName, givenName: name };
  return { ...rest, name };
}
