import { CARD_MESSAGES, type CardLanguage, type CardMessages } from '../shared/messages/card.ts';
import type { Audience } from '../shared/rules/permissions.ts';
import { type Fitted, fitSentence, fitText, LEADING, type Room } from './fit.ts';
import { printable } from './printable.ts';

export interface CardInput {
  readonly serial: string;
  readonly vesselName: string;
  readonly audience: Audience;
  readonly ssid: string;
  readonly passphrase: string;
  /** What the code holds, made by the shared Wi-Fi rules; printed as it is. */
  readonly payload: string;
  readonly language: CardLanguage;
  /** A finished line in the card's language and ship's time, or null for a passphrase in force. */
  readonly validFrom: string | null;
  readonly guestName?: string | null;
  readonly cabin?: string | null;
  /** The boat lies on the dock's shared network. */
  readonly cautionDock: boolean;
}

/** A card whose every text is known to be drawable. */
export interface PreparedCard {
  readonly serial: string;
  readonly vesselName: string;
  readonly audience: Audience;
  readonly ssid: string;
  readonly passphrase: string;
  readonly payload: string;
  readonly language: CardLanguage;
  readonly messages: CardMessages;
  readonly welcome: string;
  readonly validFrom: string;
  readonly guestName: string;
  readonly cabin: string;
  readonly cautionDock: boolean;
}

/** @throws UnprintableText naming the field and the characters no shipped font has. */
export function prepare(card: CardInput, welcomeLine: string | null): PreparedCard {
  const messages = CARD_MESSAGES[card.language];
  return {
    serial: printable('serial', card.serial),
    vesselName: printable('vessel name', card.vesselName),
    audience: card.audience,
    ssid: printable('network name', card.ssid),
    passphrase: printable('password', card.passphrase),
    payload: card.payload,
    language: card.language,
    messages,
    welcome: printable('welcome line', welcomeLine ?? messages.welcome),
    validFrom: printable('valid-from line', card.validFrom ?? ''),
    guestName: printable('guest name', card.guestName ?? ''),
    cabin: printable('cabin', card.cabin ?? ''),
    cautionDock: card.cautionDock,
  };
}

/** The welcome and whom the network is for: on one line where it fits, a line each otherwise. */
export function fitWelcome(card: PreparedCard, room: Omit<Room, 'mostLines'>): Fitted | null {
  const audience = card.messages.audience[card.audience];
  const together = fitText(`${card.welcome} ${audience}`, 400, { ...room, mostLines: 1 });
  if (together !== null && together.size === room.largest) return together;
  const lines = [card.welcome, audience].map((line) => fitSentence(line, 400, { ...room, mostLines: 2 }));
  const [first, second] = lines;
  if (!first || !second) return null;
  const size = Math.min(first.size, second.size);
  return { size, leading: size * LEADING, lines: [...first.lines, ...second.lines] };
}
