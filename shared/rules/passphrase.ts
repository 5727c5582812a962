import { PASSPHRASE_MAX, PASSPHRASE_MIN, SSID_MAX_OCTETS } from './limits.ts';

/** Why a passphrase cannot be used. */
export type PassphraseFault = 'too-short' | 'too-long' | 'raw-key' | 'character' | 'edge-space';
/** Why an SSID cannot be used. */
export type SsidFault = 'empty' | 'too-long' | 'malformed' | 'control';
/** Outcome of a check; `reason` is a sentence for the person who typed it and never repeats what was typed. */
export type Check<Code extends string> = { ok: true } | { ok: false; code: Code; reason: string };

function refuse<Code extends string>(code: Code, reason: string): Check<Code> {
  return { ok: false, code, reason };
}

/**
 * The one rule every reader accepts, for WPA2, transition and WPA3 alike: 8 to 63 characters, each
 * 0x20–0x7E. Source: IEEE 802.11-2012 M.4.1; the same bounds stand in hostapd.conf and in Microsoft's WLAN
 * profile schema. 64 hex digits are a raw 256-bit key (wpa_supplicant.conf), never a passphrase. A space at
 * either end is refused because it cannot be seen on a card (common practice, no source).
 */
export function checkPassphrase(text: string): Check<PassphraseFault> {
  if (/^[0-9A-Fa-f]{64}$/.test(text)) {
    return refuse('raw-key', 'This is a raw key of 64 digits, not a passphrase. Use 8 to 63 characters.');
  }
  if (text.length > PASSPHRASE_MAX) {
    return refuse('too-long', `This is ${text.length} characters long. Use at most ${PASSPHRASE_MAX}.`);
  }
  const wrong = text.search(/[^\x20-\x7e]/);
  if (wrong >= 0) {
    return refuse(
      'character',
      `Character ${wrong + 1} cannot be typed on every phone. Use letters without accents, digits, spaces and the signs of an English keyboard.`,
    );
  }
  if (text.length < PASSPHRASE_MIN) {
    return refuse('too-short', `This is ${text.length} characters long. Use at least ${PASSPHRASE_MIN}.`);
  }
  if (text.startsWith(' ') || text.endsWith(' ')) {
    return refuse('edge-space', 'A space at the beginning or end cannot be seen on a card. Remove it.');
  }
  return { ok: true };
}

/** Octets of the SSID in UTF-8, which is how it goes on the air and into the key derivation. */
export function ssidOctets(text: string): number {
  return new TextEncoder().encode(text).length;
}

/**
 * An SSID of 1 to 32 UTF-8 octets without control characters. Source: IEEE 802.11, SSID element (0–32
 * octets); 0 is refused because it means "any network" in a probe. Half a surrogate pair is refused because
 * it has no UTF-8 form and would silently become another name.
 */
export function checkSsid(text: string): Check<SsidFault> {
  if (text === '') return refuse('empty', 'Give the network its name as phones show it.');
  if (/\p{Cs}/u.test(text)) {
    return refuse('malformed', 'This name holds half a character. Type it again rather than pasting it.');
  }
  const control = text.search(/\p{Cc}/u);
  if (control >= 0) {
    return refuse(
      'control',
      `Character ${control + 1} is invisible (a tab, line break or the like). Remove it.`,
    );
  }
  const octets = ssidOctets(text);
  if (octets > SSID_MAX_OCTETS) {
    return refuse(
      'too-long',
      `This name takes ${octets} octets on the air and ${SSID_MAX_OCTETS} fit. Accented letters take two or more each.`,
    );
  }
  return { ok: true };
}

/**
 * What may go wrong when some phone reads this SSID from a QR code. Empty when nothing will. Source: the
 * readers' own published parsers (Android's older and newer, ZXing's) and the Wi-Fi Alliance's WPA3
 * specification, section 7, which do not agree on these values; see {@link wifiPayload} in wifi.ts.
 */
export function ssidCautions(ssid: string): string[] {
  const cautions = valueCautions(ssid);
  if (/^[0-9A-Fa-f]+$/.test(ssid)) {
    cautions.push(
      'The name is made of the digits 0–9 and A–F only: some phones take it for a number. Any other letter in it avoids that.',
    );
  }
  if (/[^\x20-\x7e]/.test(ssid)) {
    cautions.push('The name has letters outside plain English ones: some older phones show it wrongly.');
  }
  if (/^ | $| {2}/.test(ssid)) {
    cautions.push('The name has spaces that cannot be seen: somebody typing it by hand will miss them.');
  }
  return cautions;
}

/** The same for a passphrase that was typed in; what Quayword generates has none. */
export function passphraseCautions(passphrase: string): string[] {
  const cautions = valueCautions(passphrase);
  if (/ {2}/.test(passphrase)) {
    cautions.push('There are two spaces in a row: somebody typing it by hand will miss one.');
  }
  return cautions;
}

function valueCautions(value: string): string[] {
  const cautions: string[] = [];
  if (value.endsWith('\\')) {
    cautions.push('It ends in a backslash: some older phones will not read the QR code.');
  }
  if (value.length > 1 && value.startsWith('"') && value.endsWith('"')) {
    cautions.push('It stands in quotation marks: some older phones drop them when they read the QR code.');
  }
  if (/[;%]/.test(value)) {
    cautions.push(
      'It has a semicolon or a percent sign: phones do not agree on how to read those from a QR code.',
    );
  }
  return cautions;
}

/** What typing a passphrase back revealed. `lengthDifference` is typed minus expected, in characters. */
export type TypedBack = { same: true } | { same: false; lengthDifference: number; sentence: string };

/**
 * Compares a passphrase typed back without seeing it. The answer holds the difference in length and nothing
 * more: not which characters, nor how many. The work done does not depend on where the two differ.
 */
export function maskedDifference(typed: string, expected: string): TypedBack {
  const lengthDifference = typed.length - expected.length;
  let seen = lengthDifference;
  // One place past the longest passphrase, so the number of steps never follows what was typed.
  for (let place = 0; place <= PASSPHRASE_MAX; place++) {
    seen |= unitAt(typed, place) ^ unitAt(expected, place);
  }
  if (seen === 0) return { same: true };
  return { same: false, lengthDifference, sentence: differenceSentence(lengthDifference) };
}

function unitAt(text: string, place: number): number {
  const unit = text.charCodeAt(place);
  return Number.isNaN(unit) ? 0x1_0000 : unit;
}

function differenceSentence(difference: number): string {
  const count = Math.abs(difference);
  const characters = count === 1 ? '1 character' : `${count} characters`;
  if (difference === 0)
    return 'Not the same, though the length is right. Look at the access point and type it again.';
  const side = difference < 0 ? 'short' : 'long';
  return `Not the same: ${characters} too ${side}. Look at the access point and type it again.`;
}

/** One piece of a passphrase as it is shown and read aloud. */
export interface ReadingPiece {
  text: string;
  /** True for what stands between words: shown light. */
  separator: boolean;
}

/** Splits a passphrase into words and what separates them; the pieces joined give the passphrase again. */
export function wordsAndSeparators(passphrase: string): ReadingPiece[] {
  return passphrase
    .split(/([-_ ./]+)/)
    .map((text, index) => ({ text, separator: index % 2 === 1 }))
    .filter((piece) => piece.text !== '');
}

/** A passphrase cut where the eye may rest: words with their hyphens, anything else in fours. Joined they are it again. */
export function partsForReading(passphrase: string): string[] {
  const words = passphrase.split(/(?<=-)/);
  return words.length >= 3 ? words : (passphrase.match(/.{1,4}/gs) ?? [passphrase]);
}
