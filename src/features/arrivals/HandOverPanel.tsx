import { useMutation, useQueryClient } from '@tanstack/react-query';
import { useCallback, useEffect, useRef, useState } from 'react';
import type { ArrivalsView, GuestView } from '../../../shared/api/arrivals.ts';
import type { CardLanguage } from '../../../shared/api/common.ts';
import { CARD_LANGUAGES, CARD_MESSAGES } from '../../../shared/messages/card.ts';
import { Button } from '../../components/Button.tsx';
import { Caution } from '../../components/Caution.tsx';
import { DateTime } from '../../components/DateTime.tsx';
import { ErrorLine } from '../../components/ErrorLine.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { Segmented } from '../../components/Segmented.tsx';
import { printCards } from '../../lib/cardPrinting.ts';
import { sentenceFor } from '../../lib/errors.ts';
import { useSecret } from '../../lib/useSecret.ts';
import { CardFace } from './CardFace.tsx';
import { DockCaution } from './DockCaution.tsx';
import { GuestActions } from './GuestActions.tsx';
import { cardLanguageOf, guestCalled } from './guestWords.ts';
import { LargeCode } from './LargeCode.tsx';
import { arrivalsKey, handOverCard, previewCard, showCode, undoHandover } from './queries.ts';

interface HandOverPanelProps {
  vesselId: string;
  arrivals: ArrivalsView;
  guest: GuestView;
  /** Chosen by itself after the one before was served, not by a tap. */
  byItself: boolean;
  /** After a handover: the next guest is chosen. */
  onServed: (guestId: string) => void;
  /** After an undo: back to whom it was about. */
  onSelect: (guestId: string) => void;
}

/** Taps closer together than this are one, in milliseconds. */
const SECOND_TAP_MS = 350;

/** How long a code shown large stays before it hides itself, in seconds: enough for two phones. */
const LARGE_SECONDS = 60;

/** The guest chosen: their card, and the ways to give it to them. One press hands over; undo for ten seconds. */
export function HandOverPanel({
  vesselId,
  arrivals,
  guest,
  byItself,
  onServed,
  onSelect,
}: HandOverPanelProps) {
  const client = useQueryClient();
  const { say, undoable } = useNotices();
  const [language, setLanguage] = useState<CardLanguage>(cardLanguageOf(guest.language));
  const network = arrivals.network;
  const networkId = network?.id ?? '';
  const called = guestCalled(guest);
  const refresh = () => client.invalidateQueries({ queryKey: arrivalsKey(vesselId) });
  const fetchCard = useCallback(
    () => previewCard(vesselId, networkId, { guestId: guest.id, language }),
    [vesselId, networkId, guest.id, language],
  );
  const peek = useSecret(fetchCard);
  const { hide: hidePeek } = peek;
  // biome-ignore lint/correctness/useExhaustiveDependencies: another language makes what is shown stale
  useEffect(() => hidePeek(), [language, hidePeek]);

  // A second tap of the same thumb must not hand over to the guest who has just taken this one's place.
  const shownAt = useRef(performance.now());
  const handOverNow = () => {
    if (!byItself || performance.now() - shownAt.current > SECOND_TAP_MS) give.mutate();
  };

  const undo = useMutation({
    mutationFn: (handoverId: string) => undoHandover(vesselId, handoverId),
    onSuccess: async () => {
      await refresh();
      onSelect(guest.id);
      say(<SafeText>{`Taken back: ${called} has not been given the password.`}</SafeText>);
    },
    onError: (error) => say(sentenceFor(error)),
  });
  const { mutate: takeBack } = undo;
  const give = useMutation({
    mutationFn: () =>
      handOverCard(vesselId, { guestId: guest.id, networkId, cardId: guest.printedCard?.id ?? null }),
    onSuccess: async (answer) => {
      await refresh();
      if (answer.already) say(<SafeText>{answer.sentence}</SafeText>);
      else
        undoable(<SafeText>{`${called}: ${answer.sentence}`}</SafeText>, () => takeBack(answer.handoverId));
      onServed(guest.id);
    },
  });
  const fetchLarge = useCallback(async () => {
    const shown = await showCode(vesselId, networkId, guest.id, language);
    void client.invalidateQueries({ queryKey: arrivalsKey(vesselId) });
    undoable(<SafeText>{`${called}: the code was shown.`}</SafeText>, () => takeBack(shown.handoverId));
    return shown;
  }, [client, vesselId, networkId, guest.id, called, language, undoable, takeBack]);
  const code = useSecret(fetchLarge, LARGE_SECONDS);
  const print = useMutation({
    mutationFn: () =>
      printCards(vesselId, networkId, {
        guestIds: [guest.id],
        format: 'wallet',
        language,
        keepEarlier: false,
      }),
    onSuccess: async () => {
      await refresh();
      say('The card is a PDF among your downloads. Print it at actual size.');
    },
  });
  const closeLarge = () => {
    code.hide();
    onServed(guest.id);
  };

  if (!network) {
    return (
      <p className="text-soft">
        No guest network has been entered yet. The ETO or captain adds it under Networks.
      </p>
    );
  }
  const failed = give.error ?? print.error ?? (code.stage.kind === 'failed' ? code.stage.error : null);
  const nothing = !network.live && !network.staged;
  const inHand = guest.printedCard !== null;
  return (
    <div className="flex h-full flex-col gap-4">
      <div>
        <p className="text-sm text-soft">Join card for</p>
        <h2 className="text-xl">
          <SafeText>{called}</SafeText>
        </h2>
      </div>
      <CardFace
        language={language}
        ssid={network.ssid}
        serial={guest.printedCard?.serial ?? null}
        shown={peek.stage.kind === 'shown' ? peek.stage.value : null}
        cover={
          <button
            type="button"
            className="min-h-12 rounded-md px-2 text-sm font-medium underline underline-offset-4"
            onClick={() => void peek.show()}
            disabled={nothing}
          >
            {peek.stage.kind === 'fetching' ? 'Fetching…' : 'Look at the card'}
          </button>
        }
      />
      {peek.stage.kind === 'failed' ? <ErrorLine error={peek.stage.error} /> : null}
      <Segmented
        label="Language of the card"
        value={language}
        onChange={setLanguage}
        options={CARD_LANGUAGES.map((value) => ({
          value,
          label: value.toUpperCase(),
          name: CARD_MESSAGES[value].languageName,
        }))}
      />
      {network.staged ? (
        <p className="text-sm">
          A new password is in force from{' '}
          <DateTime at={network.staged.from} zone={arrivals.zone} as="words" />. Who arrives later is given
          that one.
        </p>
      ) : null}
      {arrivals.dockCaution ? <DockCaution vesselId={vesselId} /> : null}
      {nothing ? (
        <Caution>No password is on record for this network, so there is nothing to hand over yet.</Caution>
      ) : null}
      {guest.under16 ? (
        <p className="text-sm text-soft">Under 16: hand the card to a parent, or ask one first.</p>
      ) : null}
      <ErrorLine error={failed} />
      <div className="mt-auto flex flex-col gap-2.5">
        {guest.ashoreAt ? null : (
          <>
            <Button
              kind={inHand ? 'primary' : 'secondary'}
              size="large"
              wide
              disabled={nothing || !inHand}
              busy={give.isPending && 'Writing it down…'}
              onClick={handOverNow}
            >
              {inHand || !guest.handover ? 'Hand over printed card' : 'No other card is printed'}
            </Button>
            <div className="grid grid-cols-2 gap-2.5">
              <Button
                kind={inHand ? 'secondary' : 'primary'}
                size="large"
                disabled={nothing}
                busy={code.stage.kind === 'fetching' && 'Fetching…'}
                onClick={() => void code.show()}
              >
                Show large code
              </Button>
              <Button
                size="large"
                disabled={nothing}
                busy={print.isPending && 'Printing…'}
                onClick={() => print.mutate()}
              >
                {guest.printedCard || guest.handover ? 'Print another' : 'Print a card'}
              </Button>
            </div>
          </>
        )}
        <GuestActions vesselId={vesselId} arrivals={arrivals} guest={guest} />
      </div>
      {code.stage.kind === 'shown' ? (
        <LargeCode
          code={code.stage.value}
          vesselName={arrivals.vesselName}
          language={language}
          left={code.stage.left}
          onClose={closeLarge}
        />
      ) : null}
    </div>
  );
}
