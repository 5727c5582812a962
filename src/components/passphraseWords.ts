/** A word of a passphrase, or what separates two words. */
export interface PassphrasePart {
  kind: 'word' | 'separator';
  text: string;
}

/**
 * Splits a passphrase into words and the separators between them, keeping every character. Spaces count, so they
 * are shown as an open box (U+2423).
 */
export function passphraseParts(passphrase: string): PassphrasePart[] {
  return passphrase
    .split(/([-\s._]+)/)
    .filter((text) => text !== '')
    .map((text) =>
      /^[-\s._]+$/.test(text)
        ? { kind: 'separator', text: text.replaceAll(' ', '␣') }
        : { kind: 'word', text },
    );
}
