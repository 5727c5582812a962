import { useMutation } from '@tanstack/react-query';
import { useState } from 'react';
import type { RotationView } from '../../../shared/api/rotations.ts';
import { Button } from '../../components/Button.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { RadioRow } from '../../components/inputs.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { sentenceFor } from '../../lib/errors.ts';
import { AccessPointItem } from './AccessPointItem.tsx';
import { useTakeIn } from './EntrySheet.tsx';
import { isConfirmed } from './outcomeWords.ts';
import { reportDrift } from './queries.ts';

type Point = RotationView['accessPoints'][number];

interface InForceProps {
  vesselId: string;
  rotation: RotationView;
  zone: string;
  mayEnter: boolean;
}

/** A change that is in force: what each access point runs, and the ways to say that one runs something else or is right again. */
export function InForce({ vesselId, rotation, zone, mayEnter }: InForceProps) {
  const takeIn = useTakeIn(vesselId);
  const [chosen, setChosen] = useState<string | null>(null);
  const [doubted, setDoubted] = useState<Point | null>(null);
  const drifted = rotation.state === 'drifted';
  const right = rotation.accessPoints.filter(isConfirmed);
  return (
    <section aria-label="Access points" className="flex max-w-2xl flex-col gap-3">
      {drifted ? (
        <p>
          Enter the passphrase in force there again, then type it back here. The network's own page shows it.
          Nothing is overwritten by itself.
        </p>
      ) : null}
      <ul className="m-0 list-none border-t border-rule p-0">
        {rotation.accessPoints.map((point) => (
          <AccessPointItem
            key={point.id}
            {...{ vesselId, rotation, point, zone }}
            active={drifted && point.id === chosen}
            onActivate={() => setChosen(point.id)}
            ready={drifted && mayEnter}
            onStart={() => undefined}
            onChange={(next) => {
              setChosen(null);
              takeIn(next);
            }}
          />
        ))}
      </ul>
      {mayEnter && right.length > 0 ? (
        <Button kind="quiet" className="-ml-4 self-start" onClick={() => setDoubted(right[0] ?? null)}>
          An access point runs something else
        </Button>
      ) : null}
      {doubted ? (
        <DriftDialog
          vesselId={vesselId}
          rotation={rotation}
          points={right}
          onClose={() => setDoubted(null)}
          onReported={(next) => {
            setDoubted(null);
            takeIn(next);
          }}
        />
      ) : null}
    </section>
  );
}

function DriftDialog({
  vesselId,
  rotation,
  points,
  onClose,
  onReported,
}: {
  vesselId: string;
  rotation: RotationView;
  points: readonly Point[];
  onClose: () => void;
  onReported: (rotation: RotationView) => void;
}) {
  const [pointId, setPointId] = useState<string | null>(null);
  const [seen, setSeen] = useState<'old' | 'other'>('other');
  const report = useMutation({
    mutationFn: (accessPointId: string) => reportDrift(vesselId, rotation.id, accessPointId, seen),
    onSuccess: onReported,
  });
  return (
    <Dialog open onClose={onClose} title="An access point runs something else" keepOpen>
      <RadioRow
        label="Which one"
        name="access-point"
        value={pointId}
        options={points.map(({ id, name }) => ({ value: id, label: name }))}
        onChange={setPointId}
      />
      <RadioRow<'old' | 'other'>
        label="What it runs"
        name="seen"
        value={seen}
        options={[
          { value: 'old', label: 'The passphrase before' },
          {
            value: 'other',
            label: 'Something else, or not known',
            hint: 'As after a reset to the maker’s settings.',
          },
        ]}
        onChange={setSeen}
      />
      <p className="text-sm text-soft">
        From then on <SafeText>{rotation.ssid}</SafeText> counts as not the same everywhere, until it is put
        right.
      </p>
      {report.error ? (
        <p role="alert" className="text-sm font-medium text-magenta">
          {sentenceFor(report.error)}
        </p>
      ) : null}
      <div className="flex flex-wrap justify-end gap-3">
        <Button onClick={onClose}>Cancel</Button>
        <Button
          kind="primary"
          disabled={pointId === null}
          onClick={() => pointId && report.mutate(pointId)}
          busy={report.isPending && 'Saving…'}
        >
          Write it down
        </Button>
      </div>
    </Dialog>
  );
}
