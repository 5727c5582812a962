import { useMutation } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import { type VesselSettings, zoneBody } from '../../../shared/api/vessels.ts';
import { Button } from '../../components/Button.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { TextInput } from '../../components/inputs.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { ZonePicker } from '../../components/ZonePicker.tsx';
import { serverNow, useNow } from '../../lib/clock.ts';
import { fieldError, namesFields, sentenceFor } from '../../lib/errors.ts';
import { checkForm } from '../../lib/forms.ts';
import { toLocal } from '../../lib/shipLocal.ts';
import { shipClock, shipDateTime } from '../../lib/shipTime.ts';
import { zoneInWords } from '../../lib/zones.ts';
import { WhoMay } from './Facts.tsx';
import { addZone, removeZone } from './queries.ts';

interface ShipZonesProps {
  settings: VesselSettings;
  mayEdit: boolean;
}

type Span = VesselSettings['zones'][number];

/** The place in the list of the zone in force at an instant; the first one before any has begun. */
const inForce = (zones: readonly Span[], at: Date) =>
  Math.max(
    0,
    zones.findLastIndex(({ fromAt }) => Date.parse(fromAt) <= at.getTime()),
  );

/** Ship's time: what the clock shows now, what it was set to before, and the changes still to come. */
export function ShipZones({ settings, mayEdit }: ShipZonesProps) {
  const now = useNow();
  const { say, undoable } = useNotices();
  const [adding, setAdding] = useState(false);
  const { zones, id } = settings;
  const current = inForce(zones, now);
  const put = useMutation({
    mutationFn: (given: { zone: string; fromLocal: string }) => addZone(id, given),
    onError: (error) => say(sentenceFor(error)),
  });
  const take = useMutation({
    mutationFn: ({ span }: { span: Span; before: Span }) => removeZone(id, span.id),
    onSuccess: (_settings, { span, before }) =>
      undoable(`${span.zone} is taken away.`, () =>
        put.mutate({ zone: span.zone, fromLocal: toLocal(span.fromAt, before.zone) }),
      ),
    onError: (error) => say(sentenceFor(error)),
  });
  return (
    <>
      {mayEdit ? null : <WhoMay>Only the captain changes ship's time.</WhoMay>}
      <ol className="m-0 max-w-2xl list-none border-t border-rule p-0">
        {zones.map((span, index) => {
          const before = zones[index - 1];
          return (
            <li
              key={span.id}
              className="flex flex-wrap items-center justify-between gap-x-6 gap-y-1 border-b border-rule py-2"
            >
              <div className="min-w-0">
                <p className="font-medium">
                  {span.zone} <span className="font-normal text-soft">{zoneInWords(span.zone, now)}</span>
                </p>
                <p className="text-sm text-soft">
                  {before ? (
                    <TurnedAt at={span.fromAt} from={before.zone} to={span.zone} now={now} />
                  ) : (
                    `From the beginning, ${shipDateTime(span.fromAt, span.zone, now)}`
                  )}
                  {index === current ? (
                    <strong className="font-medium text-shore-ink">. In force now</strong>
                  ) : null}
                  {index > current ? '. Still to come' : null}
                </p>
              </div>
              {mayEdit && before ? (
                <Button
                  kind="quiet"
                  aria-label={`Take away ${span.zone}`}
                  onClick={() => take.mutate({ span, before })}
                  busy={take.isPending && take.variables.span.id === span.id && 'Taking away…'}
                >
                  Take away
                </Button>
              ) : null}
            </li>
          );
        })}
      </ol>
      {mayEdit ? (
        <Button className="self-start" onClick={() => setAdding(true)}>
          Change ship's time
        </Button>
      ) : null}
      {adding ? <ZoneDialog settings={settings} onClose={() => setAdding(false)} /> : null}
    </>
  );
}

/** When the clocks were or will be turned, by the clock before, and what they show right after. */
function TurnedAt({ at, from, to, now }: { at: string; from: string; to: string; now: Date }) {
  const [was, is] = [shipClock(at, from), shipClock(at, to)];
  return (
    <>
      From {shipDateTime(at, from, now)}
      {was === is ? ', the clock goes on as it was' : `, when the clock goes to ${is}`}
    </>
  );
}

function ZoneDialog({ settings, onClose }: { settings: VesselSettings; onClose: () => void }) {
  const { say } = useNotices();
  const { zones } = settings;
  const [zone, setZone] = useState('');
  const [fromLocal, setFromLocal] = useState(() => {
    const now = serverNow();
    return toLocal(now, zones[inForce(zones, now)]?.zone ?? 'UTC');
  });
  const [checked, setChecked] = useState<unknown>(null);
  const add = useMutation({
    mutationFn: () => addZone(settings.id, { zone, fromLocal }),
    onSuccess: () => {
      say("Ship's time is set. Planned changes were looked at again.");
      onClose();
    },
  });
  const error = checked ?? add.error;
  const submit = (event: FormEvent) => {
    event.preventDefault();
    const result = checkForm(zoneBody, { zone, fromLocal });
    setChecked(result.ok ? null : result.error);
    if (result.ok && !add.isPending) add.mutate();
  };
  return (
    <Dialog open onClose={onClose} title="Change ship's time" keepOpen>
      <form onSubmit={submit} noValidate className="flex flex-col gap-4">
        <p>
          From the moment given on, everything aboard is said in the new zone: quiet hours, arrivals, cards.
          Changes planned for later follow by themselves.
        </p>
        <ZonePicker label="To the zone" value={zone} onChange={setZone} error={fieldError(error, 'zone')} />
        <TextInput
          label="From"
          hint="On the clock as it stands before the change."
          type="datetime-local"
          value={fromLocal}
          onChange={(event) => setFromLocal(event.target.value)}
          error={fieldError(error, 'fromLocal')}
        />
        {error && !namesFields(error) ? (
          <p role="alert" className="text-sm font-medium text-magenta">
            {sentenceFor(error)}
          </p>
        ) : null}
        <Button type="submit" kind="primary" className="self-start" busy={add.isPending && 'Setting…'}>
          Change ship's time
        </Button>
      </form>
    </Dialog>
  );
}
