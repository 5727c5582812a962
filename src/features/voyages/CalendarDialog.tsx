import { useState } from 'react';
import type { VoyageView } from '../../../shared/api/voyages.ts';
import { VOYAGE_KIND_NAMES } from '../../../shared/rules/voyageKinds.ts';
import { Button } from '../../components/Button.tsx';
import { DateTime } from '../../components/DateTime.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { useNow } from '../../lib/clock.ts';
import { VoyageDialog } from './VoyageDialog.tsx';

interface CalendarDialogProps {
  vesselId: string;
  zone: string;
  voyages: readonly VoyageView[];
  onClose: () => void;
}

/** The calendar from today on: a voyage is pressed to correct it or take it off, and others are added. */
export function CalendarDialog({ vesselId, zone, voyages, onClose }: CalendarDialogProps) {
  const now = useNow();
  const ahead = voyages.filter(({ endsAt }) => Date.parse(endsAt) > now.getTime());
  const [open, setOpen] = useState<VoyageView | 'new' | null>(null);
  if (open) {
    return (
      <VoyageDialog
        vesselId={vesselId}
        zone={zone}
        voyage={open === 'new' ? null : open}
        onClose={() => setOpen(null)}
      />
    );
  }
  return (
    <Dialog
      open
      onClose={onClose}
      title="The calendar"
      actions={
        <Button kind="primary" onClick={() => setOpen('new')}>
          Add to the calendar
        </Button>
      }
    >
      <p className="text-soft">
        Changes are planned around it: guest networks after a party leaves, the owner's not during a trip,
        networks with equipment not during a crossing.
      </p>
      {ahead.length === 0 ? (
        <p>Nothing is on the calendar from today on.</p>
      ) : (
        <ul className="m-0 list-none border-t border-rule p-0">
          {ahead.map((voyage) => (
            <li key={voyage.id} className="border-b border-rule">
              <button
                type="button"
                onClick={() => setOpen(voyage)}
                className="min-h-14 w-full px-2 py-2 text-left hover:bg-land"
              >
                <span className="font-medium">
                  <SafeText>{voyage.title}</SafeText>
                </span>
                {voyage.title === VOYAGE_KIND_NAMES[voyage.kind] ? null : (
                  <span className="text-sm text-soft">, {VOYAGE_KIND_NAMES[voyage.kind].toLowerCase()}</span>
                )}
                <span className="block text-sm text-soft">
                  <DateTime at={voyage.startsAt} zone={zone} /> to <DateTime at={voyage.endsAt} zone={zone} />
                  <Ports voyage={voyage} />
                </span>
              </button>
            </li>
          ))}
        </ul>
      )}
    </Dialog>
  );
}

function Ports({ voyage: { fromPort, toPort } }: { voyage: VoyageView }) {
  const ports = [fromPort ? `from ${fromPort}` : '', toPort ? `to ${toPort}` : ''].filter(Boolean).join(' ');
  if (!ports) return null;
  return (
    <>
      , <SafeText>{ports}</SafeText>
    </>
  );
}
