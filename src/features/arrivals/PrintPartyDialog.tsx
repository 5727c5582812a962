import { useMutation, useQueryClient } from '@tanstack/react-query';
import { useState } from 'react';
import type { ArrivalsView } from '../../../shared/api/arrivals.ts';
import type { CardFormat } from '../../../shared/api/common.ts';
import { Button } from '../../components/Button.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { ErrorLine } from '../../components/ErrorLine.tsx';
import { Checkbox, RadioRow } from '../../components/inputs.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { CARD_FORMATS, printCards } from '../../lib/cardPrinting.ts';
import { arrivalsKey } from './queries.ts';

/** Prints cards for the whole party at once, each in its guest's language. */
export function PrintPartyDialog({
  vesselId,
  arrivals,
  onClose,
}: {
  vesselId: string;
  arrivals: ArrivalsView;
  onClose: () => void;
}) {
  const client = useQueryClient();
  const { say } = useNotices();
  const [format, setFormat] = useState<CardFormat>('wallet-sheet');
  const [onlyMissing, setOnlyMissing] = useState(true);
  const aboard = arrivals.guests.filter(({ ashoreAt }) => ashoreAt === null);
  const missing = aboard.filter(({ printedCard, handover }) => !printedCard && !handover);
  const chosen = onlyMissing ? missing : aboard;
  const print = useMutation({
    mutationFn: () =>
      printCards(vesselId, arrivals.network?.id ?? '', {
        guestIds: chosen.map(({ id }) => id),
        format,
        keepEarlier: false,
      }),
    onSuccess: async () => {
      await client.invalidateQueries({ queryKey: arrivalsKey(vesselId) });
      say('The cards are a PDF among your downloads. Print it at actual size.');
      onClose();
    },
  });
  return (
    <Dialog
      open
      onClose={onClose}
      title="Print cards for the party"
      actions={
        <Button
          kind="primary"
          size="large"
          disabled={chosen.length === 0 || !arrivals.network}
          busy={print.isPending && 'Printing…'}
          onClick={() => print.mutate()}
        >
          {chosen.length === 1 ? 'Print 1 card' : `Print ${chosen.length} cards`}
        </Button>
      }
    >
      <RadioRow label="Format" name="format" value={format} options={CARD_FORMATS} onChange={setFormat} />
      <Checkbox
        label="Only for guests without a card"
        hint={`${missing.length} of ${aboard.length} have none. A card printed again makes the earlier one void.`}
        checked={onlyMissing}
        onChange={(event) => setOnlyMissing(event.target.checked)}
      />
      <p className="text-sm text-soft">
        Each card is in its guest's language, or in English where cards are not printed in it.
      </p>
      <ErrorLine error={print.error} />
    </Dialog>
  );
}
