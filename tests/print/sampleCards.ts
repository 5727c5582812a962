import type { CardInput } from '../../print/cards.ts';
import { CARD_LANGUAGES, type CardLanguage, validFromLine } from '../../shared/messages/card.ts';
import { wifiPayload } from '../../shared/rules/wifi.ts';

/** A guest card of Tamarisk; a test states only what it is about. */
export function card(about: Partial<CardInput> = {}): CardInput {
  const ssid = about.ssid ?? 'Tamarisk Guests';
  const passphrase = about.passphrase ?? 'maple-sextant-orbit-velvet-drum';
  const language: CardLanguage = about.language ?? 'en';
  return {
    serial: 'M-1185',
    vesselName: 'Tamarisk',
    audience: 'guest',
    ssid,
    passphrase,
    payload: about.payload ?? wifiPayload({ ssid, passphrase, security: 'wpa2', hidden: false }),
    language,
    validFrom: validFromLine(language, '2026-06-14T09:00:00Z', 'Europe/Zagreb'),
    guestName: null,
    cabin: null,
    cautionDock: false,
    ...about,
  };
}

/** Everything a card can carry at once, in each language. */
export const FULL_CARDS: readonly CardInput[] = CARD_LANGUAGES.flatMap((language, i) =>
  (['owner', 'guest', 'crew'] as const).map((audience) =>
    card({
      language,
      audience,
      serial: `M-${1200 + i}`,
      ssid: `Tamarisk ${audience}`,
      guestName: 'Livia Quaranta',
      cabin: 'Port VIP',
      cautionDock: true,
    }),
  ),
);

/** The longest a network may have: 32 octets of name, 63 characters of passphrase, and worse shapes. */
export const HARD_CARDS: readonly CardInput[] = [
  card({ ssid: 'Motor Yacht Tamarisk Guest Wi-Fi', passphrase: longWords() }),
  card({ ssid: 'W'.repeat(32), passphrase: 'W'.repeat(63), cautionDock: true }),
  card({ ssid: ';'.repeat(32), passphrase: `${'\\'.repeat(62)};`, language: 'it' }),
  card({ ssid: 'Επισκέπτες', passphrase: 'i'.repeat(63), vesselName: 'Θάλασσα', language: 'de' }),
  card({ ssid: 'Гости Ёлка', passphrase: '12345678', vesselName: 'Северное сияние' }),
  card({ ssid: ' Two  spaces ', passphrase: 'my cat  sat on a mat', language: 'fr' }),
  card({ ssid: 'S:P:T:WPA', passphrase: ';P:x;;S:"y",\\', language: 'es' }),
  card({ ssid: 'É', passphrase: 'a-b_c.d e-f_g.h i', guestName: 'Łucja Đorđević', cabin: 'Næsby' }),
  card({ ssid: 'ABCD1234', passphrase: '0'.repeat(63), vesselName: 'The Most Serene Lady of Korčula' }),
];

function longWords(): string {
  const words = 'maple-sextant-orbit-velvet-drum-lantern-harbour-quay-abacus-zips';
  return words.slice(0, 63);
}
