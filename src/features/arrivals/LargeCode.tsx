import type { ShownCode } from '../../../shared/api/cards.ts';
import type { CardLanguage } from '../../../shared/api/common.ts';
import { CARD_MESSAGES } from '../../../shared/messages/card.ts';
import { Button } from '../../components/Button.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { PassphraseWords } from '../../components/Passphrase.tsx';
import { QrCode } from '../../components/QrCode.tsx';
import { SafeText } from '../../components/SafeText.tsx';

interface LargeCodeProps {
  code: ShownCode;
  vesselName: string;
  language: CardLanguage;
  /** Seconds until it hides itself. */
  left: number;
  onClose: () => void;
}

/** The code for a guest to point a phone at, in the language of the card, over the whole screen. */
export function LargeCode({ code, vesselName, language, left, onClose }: LargeCodeProps) {
  const messages = CARD_MESSAGES[language];
  return (
    <Dialog
      open
      onClose={onClose}
      size="full"
      title={<SafeText>{vesselName}</SafeText>}
      actions={
        <>
          <span className="self-center text-sm text-soft">Hides itself in {left} s</span>
          <Button kind="primary" size="large" onClick={onClose}>
            Done
          </Button>
        </>
      }
    >
      <div className="grid grow place-items-center gap-6 landscape:grid-cols-2" lang={language}>
        <QrCode
          text={code.payload}
          label={`Code that joins ${code.ssid}`}
          className="w-full max-w-[min(28rem,60vh)]"
        />
        <div className="flex w-full max-w-md flex-col gap-5">
          <p className="text-lg">{messages.instruction}</p>
          <div>
            <p className="text-sm text-soft">{messages.network}</p>
            <p className="text-2xl font-medium break-words">
              <SafeText>{code.ssid}</SafeText>
            </p>
          </div>
          <div>
            <p className="text-sm text-soft">{messages.password}</p>
            <p className="text-3xl leading-snug">
              <PassphraseWords>{code.passphrase}</PassphraseWords>
            </p>
          </div>
          {code.validFrom ? <p className="text-sm text-soft">{code.validFrom}</p> : null}
          {code.cautionDock ? <p className="text-sm">{messages.caution.join(' ')}</p> : null}
        </div>
      </div>
    </Dialog>
  );
}
