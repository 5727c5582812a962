import { useQueryClient } from '@tanstack/react-query';
import { useCallback, useState } from 'react';
import type { RotationView } from '../../../shared/api/rotations.ts';
import { Button } from '../../components/Button.tsx';
import { Caution } from '../../components/Caution.tsx';
import { DateTime } from '../../components/DateTime.tsx';
import { SegmentProgress } from '../../components/SegmentProgress.tsx';
import { useNow } from '../../lib/clock.ts';
import { sentenceFor } from '../../lib/errors.ts';
import { useSecret } from '../../lib/useSecret.ts';
import { AccessPointItem } from './AccessPointItem.tsx';
import { GiveUpDialog } from './GiveUpDialog.tsx';
import { isConfirmed } from './outcomeWords.ts';
import { openSheet, rotationQuery, vesselKey } from './queries.ts';
import { SheetPassphrase } from './SheetPassphrase.tsx';

interface EntrySheetProps {
  vesselId: string;
  rotation: RotationView;
  zone: string;
  onGivenUp: (next: RotationView) => void;
}

/** Keeps the answer of a step and looks at everything else of the vessel again. */
export function useTakeIn(vesselId: string) {
  const client = useQueryClient();
  return (rotation: RotationView) => {
    client.setQueryData(rotationQuery(vesselId, rotation.id).queryKey, rotation);
    void client.invalidateQueries({ queryKey: vesselKey(vesselId) });
  };
}

/**
 * The new passphrase, to be entered into each access point by hand, and each confirmed by typing it back. All of
 * it is kept by the server, so it can be left and taken up again on another device.
 */
export function EntrySheet({ vesselId, rotation, zone, onGivenUp }: EntrySheetProps) {
  const client = useQueryClient();
  const takeIn = useTakeIn(vesselId);
  const now = useNow();
  const [givingUp, setGivingUp] = useState(false);
  const [chosen, setChosen] = useState<string | null>(null);
  const fetchSecret = useCallback(async () => {
    const sheet = await openSheet(vesselId, rotation.id);
    await client.invalidateQueries({ queryKey: rotationQuery(vesselId, rotation.id).queryKey });
    return sheet;
  }, [client, vesselId, rotation.id]);
  const { stage, show, hide } = useSecret(fetchSecret);
  const opened = rotation.handedOutAt !== null;
  const early = !opened && Date.parse(rotation.dueAt) > now.getTime();
  const open = rotation.accessPoints.filter((point) => !isConfirmed(point));
  const active =
    open.find(({ id }) => id === chosen)?.id ??
    open.find(({ seen }) => seen !== 'unreachable')?.id ??
    open[0]?.id ??
    null;
  const back = rotation.reasons.some(({ code }) => code === 'going_back');
  return (
    <>
      <SegmentProgress
        done={rotation.verified}
        total={rotation.of}
        label="Access points confirmed"
        className="max-w-2xl"
      />
      {early ? (
        <Caution>
          This change is planned for <DateTime at={rotation.dueAt} zone={zone} as="words" />. Opening the
          sheet starts it now: from then on it can only be finished or given up.
        </Caution>
      ) : null}
      <div className="grid gap-x-10 gap-y-6 lg:grid-cols-[minmax(0,1fr)_minmax(0,1.1fr)]">
        <section
          aria-label="The passphrase"
          className="flex flex-col gap-3 self-start rounded-lg bg-shoal p-5"
        >
          <h2 className="text-lg">
            {back ? '1. The passphrase before, to put back' : '1. Enter it at an access point'}
          </h2>
          {stage.kind === 'shown' ? (
            <SheetPassphrase sheet={stage.value} left={stage.left} onHide={hide} />
          ) : (
            <>
              <Button
                kind={opened ? 'secondary' : 'primary'}
                className="self-start"
                onClick={() => void show()}
                busy={stage.kind === 'fetching' && 'Opening…'}
              >
                {opened
                  ? 'Show the passphrase again'
                  : early
                    ? 'Open the sheet and start now'
                    : 'Open the sheet'}
              </Button>
              {stage.kind === 'failed' ? (
                <p role="alert" className="text-sm font-medium text-magenta">
                  {sentenceFor(stage.error)}
                </p>
              ) : (
                <p className="text-sm text-soft">
                  Each showing is written to the log. It hides itself after 30 seconds and while you type it
                  back.
                </p>
              )}
            </>
          )}
        </section>
        <section aria-label="Access points" className="flex flex-col gap-3">
          <h2 className="text-lg">2. Type it back, one access point after the other</h2>
          {opened ? null : <p className="text-sm text-soft">Open the sheet first.</p>}
          <ul className="m-0 list-none border-t border-rule p-0">
            {rotation.accessPoints.map((point) => (
              <AccessPointItem
                key={point.id}
                {...{ vesselId, rotation, point, zone }}
                active={point.id === active}
                onActivate={() => setChosen(point.id)}
                ready={opened}
                onStart={hide}
                onChange={(next) => {
                  setChosen(null);
                  takeIn(next);
                }}
              />
            ))}
          </ul>
          {rotation.may.giveUp ? (
            <Button kind="quiet" className="-ml-4 self-start" onClick={() => setGivingUp(true)}>
              Give up this change
            </Button>
          ) : null}
        </section>
      </div>
      {givingUp ? (
        <GiveUpDialog
          vesselId={vesselId}
          rotation={rotation}
          onClose={() => setGivingUp(false)}
          onGivenUp={(next) => {
            setGivingUp(false);
            onGivenUp(next);
          }}
        />
      ) : null}
    </>
  );
}
