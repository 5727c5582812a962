import { Fragment } from 'react';
import { wordsAndSeparators } from '../../shared/rules/passphrase.ts';

/**
 * A passphrase word by word, separators light, breaking only after a separator. Ligatures are off; spaces count, so
 * they are shown as an open box (U+2423).
 */
export function PassphraseWords({ children }: { children: string }) {
  return (
    <span translate="no" className="font-medium [font-variant-ligatures:none]" dir="ltr">
      {wordsAndSeparators(children).map(({ text, separator }, index) =>
        separator ? (
          // biome-ignore lint/suspicious/noArrayIndexKey: the pieces of one passphrase have no other identity
          <Fragment key={index}>
            <span className="font-light opacity-80">{text.replaceAll(' ', '␣')}</span>
            <wbr />
          </Fragment>
        ) : (
          // biome-ignore lint/suspicious/noArrayIndexKey: the pieces of one passphrase have no other identity
          <span key={index} className="break-words">
            {text}
          </span>
        ),
      )}
    </span>
  );
}
