/**
 * The words of a join card, in every language it is printed in. The printed card and the preview
 * on the screen both read them from here, so that they cannot differ. Safe for the browser.
 *
 * Guests are addressed formally. Where a language would need the reader's gender the sentence is
 * put impersonally instead.
 */

import type { Audience } from '../rules/permissions.ts';

export const CARD_LANGUAGES = ['en', 'fr', 'it', 'es', 'de'] as const;

export type CardLanguage = (typeof CARD_LANGUAGES)[number];

export interface CardMessages {
  /** The language's own name, for choosing it. */
  readonly languageName: string;
  readonly network: string;
  readonly password: string;
  readonly welcome: string;
  readonly audience: Readonly<Record<Audience, string>>;
  readonly instruction: string;
  /** Two sentences: what is so on the dock, and what to do about it. Common practice, no source. */
  readonly caution: readonly [string, string];
  readonly handBack: string;
}

export const CARD_MESSAGES: Readonly<Record<CardLanguage, CardMessages>> = {
  en: {
    languageName: 'English',
    network: 'Network',
    password: 'Password',
    welcome: 'Welcome aboard.',
    audience: {
      owner: 'Wi-Fi for the owner.',
      guest: 'Wi-Fi for our guests.',
      crew: 'Wi-Fi for the crew.',
    },
    instruction: 'Point your phone’s camera at the square, then tap to join.',
    caution: [
      'In port we may share the marina’s connection.',
      'Please leave banking for later or ask the crew.',
    ],
    handBack: 'Please hand this card back when you leave.',
  },
  fr: {
    languageName: 'Français',
    network: 'Réseau',
    password: 'Mot de passe',
    welcome: 'Bienvenue à bord.',
    audience: {
      owner: 'Le Wi-Fi du propriétaire.',
      guest: 'Le Wi-Fi de nos invités.',
      crew: 'Le Wi-Fi de l’équipage.',
    },
    instruction: 'Visez le carré avec l’appareil photo de votre téléphone, puis touchez pour vous connecter.',
    caution: [
      'Au port, nous partageons parfois la connexion de la marina.',
      'Pour vos opérations bancaires, attendez la mer ou demandez conseil à l’équipage.',
    ],
    handBack: 'Merci de nous rendre cette carte à votre départ.',
  },
  it: {
    languageName: 'Italiano',
    network: 'Rete',
    password: 'Password',
    welcome: 'Benvenuti a bordo.',
    audience: {
      owner: 'Il Wi-Fi dell’armatore.',
      guest: 'Il Wi-Fi per i nostri ospiti.',
      crew: 'Il Wi-Fi dell’equipaggio.',
    },
    instruction: 'Inquadrare il quadrato con la fotocamera del telefono, poi toccare per collegarsi.',
    caution: [
      'In porto possiamo condividere la connessione del marina.',
      'Si consiglia di rimandare le operazioni bancarie o di chiedere all’equipaggio.',
    ],
    handBack: 'Si prega di restituire questa tessera alla partenza.',
  },
  es: {
    languageName: 'Español',
    network: 'Red',
    password: 'Contraseña',
    welcome: 'Bienvenidos a bordo.',
    audience: {
      owner: 'La Wi-Fi del armador.',
      guest: 'La Wi-Fi de nuestros invitados.',
      crew: 'La Wi-Fi de la tripulación.',
    },
    instruction: 'Enfoque el cuadrado con la cámara de su teléfono y toque para conectarse.',
    caution: [
      'En puerto podemos compartir la conexión de la marina.',
      'Deje las gestiones bancarias para más tarde o consulte a la tripulación.',
    ],
    handBack: 'Le rogamos que devuelva esta tarjeta al desembarcar.',
  },
  de: {
    languageName: 'Deutsch',
    network: 'Netzwerk',
    password: 'Passwort',
    welcome: 'Willkommen an Bord.',
    audience: {
      owner: 'WLAN für den Eigner.',
      guest: 'WLAN für unsere Gäste.',
      crew: 'WLAN für die Crew.',
    },
    instruction:
      'Richten Sie die Kamera Ihres Telefons auf das Quadrat und tippen Sie, um sich zu verbinden.',
    caution: [
      'Im Hafen nutzen wir eventuell das Netz der Marina.',
      'Bitte verschieben Sie Bankgeschäfte oder fragen Sie die Crew.',
    ],
    handBack: 'Bitte geben Sie diese Karte bei der Abreise zurück.',
  },
};

interface DateParts {
  readonly weekday: string;
  readonly day: string;
  readonly month: string;
  readonly hour: string;
  readonly minute: string;
}

const FROM_LINE: Readonly<Record<CardLanguage, (at: DateParts) => string>> = {
  en: (at) => `From ${at.weekday} ${at.day} ${at.month}, ${at.hour}:${at.minute}`,
  fr: (at) => `À partir du ${at.weekday} ${at.day} ${at.month}, ${at.hour} h ${at.minute}`,
  it: (at) => `Valida da ${at.weekday} ${at.day} ${at.month}, ore ${at.hour}:${at.minute}`,
  es: (at) => `Válida desde el ${at.weekday} ${at.day} de ${at.month}, ${at.hour}:${at.minute}`,
  de: (at) => `Gültig ab ${at.weekday}, ${at.day}. ${at.month}, ${at.hour}:${at.minute} Uhr`,
};

const LOCALE: Readonly<Record<CardLanguage, string>> = {
  en: 'en-GB',
  fr: 'fr-FR',
  it: 'it-IT',
  es: 'es-ES',
  de: 'de-DE',
};

/**
 * The card's valid-from line, such as "From Sun 14 June, 11:00", in ship's time.
 *
 * @param iso an instant in ISO 8601 with an offset or Z; a bracketed zone after it is allowed and
 *   not read.
 * @param timeZone IANA name of the zone that ship's time follows at that instant.
 * @throws RangeError when the instant cannot be read, has no offset, or the zone is unknown.
 */
export function validFromLine(language: CardLanguage, iso: string, timeZone: string): string {
  const instant = iso.replace(/\[[^\]]*\]$/u, '');
  if (!/(?:Z|[+-]\d{2}:?\d{2})$/iu.test(instant)) {
    throw new RangeError("A card's valid-from time needs an offset or Z, or it means no instant.");
  }
  const parts = new Map(
    new Intl.DateTimeFormat(LOCALE[language], {
      timeZone,
      weekday: 'short',
      day: 'numeric',
      month: 'long',
      hour: '2-digit',
      minute: '2-digit',
      hourCycle: 'h23',
    })
      .formatToParts(new Date(instant))
      .map((part) => [part.type, part.value]),
  );
  const read = (type: Intl.DateTimeFormatPartTypes) => parts.get(type) ?? '';
  return FROM_LINE[language]({
    weekday: read('weekday'),
    day: read('day'),
    month: read('month'),
    hour: read('hour').padStart(2, '0'),
    minute: read('minute').padStart(2, '0'),
  });
}
