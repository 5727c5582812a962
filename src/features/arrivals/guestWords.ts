import type { GuestView } from '../../../shared/api/arrivals.ts';
import type { CardLanguage, Language } from '../../../shared/api/common.ts';
import { CARD_LANGUAGES } from '../../../shared/messages/card.ts';
import { LANGUAGE_NAMES } from '../../lib/languages.ts';

/** The language of somebody's card: their own where cards are printed in it, else English. */
export function cardLanguageOf(language: Language): CardLanguage {
  return CARD_LANGUAGES.find((known) => known === language) ?? 'en';
}

/** How a guest is called on screens. */
export const guestCalled = (guest: GuestView): string => guest.name ?? guest.label;

/** What stands behind the name in light type. */
export function guestNotes(guest: GuestView): string {
  const notes = [
    guest.erasedAt ? 'name erased' : guest.name === null ? 'name withheld' : '',
    guest.under16 ? 'under 16' : '',
    guest.language === 'en' ? '' : LANGUAGE_NAMES[guest.language],
  ];
  return notes.filter(Boolean).join(', ');
}

/** Guests by deck in the order given, each deck's by cabin. */
export function byDeck(guests: readonly GuestView[]): { deck: string; guests: GuestView[] }[] {
  const decks: { deck: string; guests: GuestView[] }[] = [];
  for (const guest of guests) {
    const deck = guest.cabin?.deck ?? 'No cabin yet';
    const known = decks.find((one) => one.deck === deck);
    if (known) known.guests.push(guest);
    else decks.push({ deck, guests: [guest] });
  }
  return decks;
}

/** The next guest who has been given nothing, after this one and then from the top. */
export function nextToServe(guests: readonly GuestView[], after: string | null): GuestView | null {
  const from = guests.findIndex(({ id }) => id === after) + 1;
  const turned = [...guests.slice(from), ...guests.slice(0, from)];
  return (
    turned.find((guest) => guest.handover === null && guest.ashoreAt === null && guest.id !== after) ?? null
  );
}
