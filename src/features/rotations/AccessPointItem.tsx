import { useState } from 'react';
import type { RotationView } from '../../../shared/api/rotations.ts';
import { Button } from '../../components/Button.tsx';
import { DateTime } from '../../components/DateTime.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { cx } from '../../lib/cx.ts';
import { isConfirmed, outcomeWords } from './outcomeWords.ts';
import { confirmAccessPoint, putRight } from './queries.ts';
import { TypeBackForm } from './TypeBackForm.tsx';
import { UnreachableForm } from './UnreachableForm.tsx';

interface AccessPointItemProps {
  vesselId: string;
  rotation: RotationView;
  point: RotationView['accessPoints'][number];
  zone: string;
  /** Its box is open. */
  active: boolean;
  onActivate: () => void;
  /** The sheet has been opened, so that there is something to type back. */
  ready: boolean;
  onStart: () => void;
  onChange: (rotation: RotationView) => void;
}

/** One access point of the sheet: what is known of it, and the box to type the passphrase back. */
export function AccessPointItem(props: AccessPointItemProps) {
  const { vesselId, rotation, point, zone, active, onActivate, ready, onStart, onChange } = props;
  const [away, setAway] = useState(false);
  const confirmed = isConfirmed(point);
  const drifted = rotation.state === 'drifted';
  const attention = point.seen === 'other' || point.seen === 'unreachable' || (drifted && !confirmed);
  return (
    <li className={cx('border-b border-rule px-3 py-3', active && !confirmed && 'bg-land')}>
      <div className="grid grid-cols-[1fr_auto] items-center gap-x-4 gap-y-2 sm:grid-cols-[1fr_auto_auto]">
        <div>
          <p className="text-lg font-medium">
            <SafeText>{point.name}</SafeText>
          </p>
          {point.deck ? (
            <p className="text-sm text-soft">
              <SafeText>{point.deck}</SafeText>
            </p>
          ) : null}
        </div>
        <p
          className={cx(
            'text-right text-sm',
            confirmed && 'font-medium text-shore-ink',
            attention && 'font-medium text-magenta',
          )}
        >
          {outcomeWords(point)}
          {point.seenAt ? (
            <span className="font-normal text-soft">
              , <DateTime at={point.seenAt} zone={zone} as="moment" />
            </span>
          ) : null}
        </p>
        {!confirmed && !active && ready ? (
          <Button
            className="max-sm:col-start-2"
            onClick={onActivate}
            aria-label={`Confirm this one: ${point.name}`}
          >
            Confirm this one
          </Button>
        ) : null}
      </div>
      {active && !confirmed && ready ? (
        <div className="mt-3">
          {away ? (
            <UnreachableForm
              vesselId={vesselId}
              rotationId={rotation.id}
              accessPointId={point.id}
              onClose={() => setAway(false)}
              onDone={(next) => {
                setAway(false);
                onChange(next);
              }}
            />
          ) : (
            <>
              <TypeBackForm
                name={point.name}
                button={drifted ? 'Put right' : 'Confirm'}
                send={(typed) =>
                  drifted
                    ? putRight(vesselId, rotation.id, point.id, typed)
                    : confirmAccessPoint(vesselId, rotation.id, point.id, typed)
                }
                onStart={onStart}
                onDone={onChange}
              />
              {drifted || point.seen === 'unreachable' ? null : (
                <Button kind="quiet" className="-ml-4" onClick={() => setAway(true)}>
                  It cannot be reached
                </Button>
              )}
            </>
          )}
        </div>
      ) : null}
    </li>
  );
}
