import { Fragment } from 'react';
import { sentenceFor } from '../lib/errors.ts';
import { useSecret } from '../lib/useSecret.ts';
import { Button } from './Button.tsx';
import { passphraseParts } from './passphraseWords.ts';

/** A passphrase word by word, separators light, breaking only after a separator. Ligatures are off. */
export function PassphraseWords({ children }: { children: string }) {
  return (
    <span translate="no" className="font-medium [font-variant-ligatures:none]" dir="ltr">
      {passphraseParts(children).map((part, index) =>
        part.kind === 'word' ? (
          // biome-ignore lint/suspicious/noArrayIndexKey: the parts of one passphrase have no other identity
          <span key={index} className="break-words">
            {part.text}
          </span>
        ) : (
          // biome-ignore lint/suspicious/noArrayIndexKey: as above
          <Fragment key={index}>
            <span className="font-light opacity-80">{part.text}</span>
            <wbr />
          </Fragment>
        ),
      )}
    </span>
  );
}

interface PassphraseProps {
  /** Fetches the passphrase; the server logs it. Keep it stable with useCallback. */
  onReveal: () => Promise<string>;
  /** What the button says. */
  label?: string;
  size?: 'normal' | 'large';
}

/**
 * A passphrase hidden behind a press. Each press is a reveal that the server logs; what it shows is gone from the
 * page after 30 seconds, when the page is left, and when the component goes (R29).
 */
export function Passphrase({ onReveal, label = 'Show the passphrase', size = 'normal' }: PassphraseProps) {
  const { stage, show, hide } = useSecret(onReveal);
  if (stage.kind === 'shown') {
    return (
      <div className="flex flex-col items-start gap-2">
        <p className={size === 'large' ? 'text-3xl' : 'text-xl'}>
          <PassphraseWords>{stage.value}</PassphraseWords>
        </p>
        <div className="flex items-center gap-2 text-sm text-soft">
          <span role="status">Hides itself in {stage.left} s</span>
          <Button kind="quiet" onClick={hide}>
            Hide now
          </Button>
        </div>
      </div>
    );
  }
  return (
    <div className="flex flex-col items-start gap-2">
      <Button onClick={() => void show()} busy={stage.kind === 'fetching' && 'Fetching…'}>
        {label}
      </Button>
      {stage.kind === 'failed' ? (
        <p role="alert" className="text-sm font-medium text-magenta">
          {sentenceFor(stage.error)}
        </p>
      ) : (
        <p className="text-sm text-soft">
          Showing it is written to the log. It hides itself after 30 seconds.
        </p>
      )}
    </div>
  );
}
