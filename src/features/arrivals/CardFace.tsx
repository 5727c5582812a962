import type { CardPreview } from '../../../shared/api/cards.ts';
import type { CardLanguage } from '../../../shared/api/common.ts';
import { CARD_MESSAGES } from '../../../shared/messages/card.ts';
import { PassphraseWords } from '../../components/Passphrase.tsx';
import { QrCode } from '../../components/QrCode.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { Scale } from '../../components/Scale.tsx';

interface CardFaceProps {
  language: CardLanguage;
  ssid: string;
  serial: string | null;
  /** The card's code and words; null keeps them covered. */
  shown: CardPreview | null;
  /** What covers them: the way to show them. */
  cover: React.ReactNode;
}

/** A join card as it is printed, its code and passphrase covered until somebody asks for them. */
export function CardFace({ language, ssid, serial, shown, cover }: CardFaceProps) {
  const messages = CARD_MESSAGES[language];
  return (
    <div className="overflow-hidden rounded-lg border border-card-ink bg-card text-card-ink shadow-card">
      <Scale segments={12} className="h-1.5" />
      <div className="grid grid-cols-[minmax(7.5rem,9.5rem)_1fr] gap-4 p-4">
        <div className="aspect-square">
          {shown ? (
            <QrCode text={shown.payload} label={`Code that joins ${ssid}`} className="size-full" />
          ) : (
            <div className="grid size-full place-items-center rounded-md border border-dashed border-card-soft p-2 text-center">
              {cover}
            </div>
          )}
        </div>
        <div className="flex min-w-0 flex-col gap-2" lang={language}>
          <div>
            <p className="text-xs text-card-soft">{messages.network}</p>
            <p className="text-lg leading-tight font-medium break-words">
              <SafeText>{ssid}</SafeText>
            </p>
          </div>
          <div>
            <p className="text-xs text-card-soft">{messages.password}</p>
            {shown ? (
              <p className="text-lg leading-snug">
                <PassphraseWords>{shown.passphrase}</PassphraseWords>
              </p>
            ) : (
              <p aria-hidden="true" className="text-lg leading-snug tracking-widest text-card-soft">
                ••••• ••••• •••••
              </p>
            )}
          </div>
        </div>
      </div>
      <p className="flex justify-between gap-4 px-4 pb-3 text-xs text-card-soft" lang={language}>
        <span>{shown?.validFrom ?? ''}</span>
        <span>{shown?.card.serial ?? serial ?? ''}</span>
      </p>
    </div>
  );
}
