import type { EntrySheet } from '../../../shared/api/rotations.ts';
import { Button } from '../../components/Button.tsx';
import { PassphraseWords } from '../../components/Passphrase.tsx';
import { SafeText } from '../../components/SafeText.tsx';

interface SheetPassphraseProps {
  sheet: EntrySheet;
  /** Seconds until it hides itself. */
  left: number;
  onHide: () => void;
}

const SECURITY: Record<EntrySheet['security'], string> = {
  wpa2: 'WPA2 (personal)',
  transition: 'WPA2 and WPA3 together (personal)',
  wpa3: 'WPA3 only (personal)',
};

/** The passphrase to enter, whole and piece by piece, with what else an access point asks for. */
export function SheetPassphrase({ sheet, left, onHide }: SheetPassphraseProps) {
  const words = sheet.parts.some((part) => part.endsWith('-'));
  return (
    <div className="flex flex-col gap-4">
      <p className="text-3xl leading-snug">
        <PassphraseWords>{sheet.passphrase}</PassphraseWords>
      </p>
      <div>
        <p className="text-sm text-soft">
          {words
            ? `Piece by piece, hyphens included; ${sheet.passphrase.length} characters, no spaces, all small letters.`
            : `In pieces to keep your place, nothing between them; ${sheet.passphrase.length} characters in all.`}
        </p>
        <ol
          translate="no"
          dir="ltr"
          className="m-0 mt-2 flex list-none flex-wrap gap-2 p-0 text-lg [font-variant-ligatures:none]"
        >
          {sheet.parts.map((part, index) => (
            <li
              // biome-ignore lint/suspicious/noArrayIndexKey: pieces of one passphrase have no other identity
              key={index}
              className="rounded-md border border-shallow bg-paper px-2.5 py-1"
            >
              {part.replaceAll(' ', '␣')}
            </li>
          ))}
        </ol>
      </div>
      <p className="text-sm">
        Network <SafeText>{sheet.ssid}</SafeText>, {SECURITY[sheet.security]}
        {sheet.hidden ? ', hidden' : ''}. Leave these as they are; only the passphrase changes.
      </p>
      <div className="flex items-center gap-2 text-sm text-soft">
        <span role="status">Hides itself in {left} s</span>
        <Button kind="quiet" onClick={onHide}>
          Hide now
        </Button>
      </div>
    </div>
  );
}
