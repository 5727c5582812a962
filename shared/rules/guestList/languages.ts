import type { Language } from '../../api/common.ts';
import { plainly } from './plainText.ts';

/** A language by its name in itself and in English, French, Italian, Spanish and German, and by its code (ISO 639). */
const WORDS: Record<Language, string> = {
  en: 'en|eng|english|anglais|inglese|ingles|englisch|british|american|uk|us|gb',
  fr: 'fr|fra|fre|french|francais|francese|frances|franzosisch',
  it: 'it|ita|italian|italien|italiano|italiana|italienisch',
  es: 'es|esp|spa|spanish|espagnol|spagnolo|espanol|castellano|spanisch',
  de: 'de|deu|ger|german|allemand|tedesco|aleman|deutsch',
  pt: 'pt|por|portuguese|portugais|portoghese|portugues|portugiesisch',
  nl: 'nl|nld|dut|dutch|neerlandais|hollandais|olandese|neerlandes|holandes|niederlandisch|hollandisch|nederlands',
  el: 'el|ell|gre|gr|greek|grec|greco|griego|griechisch|ελληνικα',
  ru: 'ru|rus|russian|russe|russo|ruso|russisch|русскии',
  tr: 'tr|tur|turkish|turc|turco|turkisch|turkce',
  ar: 'ar|ara|arabic|arabe|arabo|arabisch|العربية',
  zh: 'zh|zho|chi|cn|chinese|mandarin|chinois|cinese|chino|chinesisch|中文',
  ja: 'ja|jpn|jp|japanese|japonais|giapponese|japones|japanisch|日本語',
};

const KNOWN = new Map(
  Object.entries(WORDS).flatMap(([code, words]) =>
    words.split('|').map((word): [string, Language] => [plainly(word), code as Language]),
  ),
);

/** The first language a cell names ("it", "Italian", "it-IT", "Italiano / English"), or null. */
export function languageOf(text: string): Language | null {
  const whole = KNOWN.get(plainly(text));
  if (whole) return whole;
  for (const word of plainly(text).split(' ').slice(0, 6)) {
    const known = KNOWN.get(word);
    if (known) return known;
  }
  return null;
}
