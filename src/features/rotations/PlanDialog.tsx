import { useMutation, useQuery, useQueryClient } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import type { NetworkView } from '../../../shared/api/networks.ts';
import type { ChangeReason } from '../../../shared/api/rotations.ts';
import { hasStarted } from '../../../shared/rules/hasStarted.ts';
import { Button } from '../../components/Button.tsx';
import { Caution } from '../../components/Caution.tsx';
import { DateTime } from '../../components/DateTime.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { Select, TextInput } from '../../components/inputs.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { serverNow } from '../../lib/clock.ts';
import { fieldError, namesFields, sentenceFor } from '../../lib/errors.ts';
import { fromLocal, toLocal } from '../../lib/shipLocal.ts';
import { shipDateTime } from '../../lib/shipTime.ts';
import { cancelRotation, moveRotation, planFor, rotationQuery, vesselKey } from './queries.ts';
import { REASON_CHOICES } from './reasons.ts';

interface PlanDialogProps {
  vesselId: string;
  zone: string;
  network: NetworkView;
  /** Why the change is planned when it is, in words; empty without one. */
  why: string;
  onClose: () => void;
}

/** Shows what is planned for a network and why; moves it, cancels it, or plans a change for a time. */
export function PlanDialog({ vesselId, zone, network, why, onClose }: PlanDialogProps) {
  const { change } = network;
  const title = (
    <>
      Plan the change of <SafeText>{network.ssid}</SafeText>
    </>
  );
  return (
    <Dialog open onClose={onClose} title={title} keepOpen>
      {change && hasStarted(change) ? (
        <p>
          {change.sentence} Finish this change, or give it up on the network's own page, before planning
          another.
        </p>
      ) : (
        <PlanForm {...{ vesselId, zone, network, why, onClose }} />
      )}
    </Dialog>
  );
}

function PlanForm({ vesselId, zone, network, why, onClose }: PlanDialogProps) {
  const client = useQueryClient();
  const { say } = useNotices();
  const { change } = network;
  const detail = useQuery({ ...rotationQuery(vesselId, change?.id ?? ''), enabled: change !== null });
  const [local, setLocal] = useState(() =>
    change
      ? toLocal(change.dueAt, zone)
      : `${toLocal(new Date(serverNow().getTime() + 86_400_000), zone).slice(0, 10)}T10:00`,
  );
  const [reason, setReason] = useState<ChangeReason>('routine');
  const [wrong, setWrong] = useState<string | undefined>();
  const done = async (sentence: string) => {
    await client.invalidateQueries({ queryKey: vesselKey(vesselId) });
    say(sentence);
    onClose();
  };
  const plan = useMutation({
    mutationFn: (dueAt: string) =>
      change ? moveRotation(vesselId, change.id, dueAt) : planFor(vesselId, network.id, { dueAt, reason }),
    onSuccess: ({ dueAt }) => done(`Planned for ${shipDateTime(dueAt, zone, serverNow())}, ship's time.`),
  });
  const cancel = useMutation({
    mutationFn: () => cancelRotation(vesselId, change?.id ?? ''),
    onSuccess: ({ next }) =>
      done(
        next
          ? `Cancelled. The plan's next one is ${shipDateTime(next.dueAt, zone, serverNow())}.`
          : 'Cancelled. Nothing is planned for this network now.',
      ),
  });
  const submit = (event: FormEvent) => {
    event.preventDefault();
    const dueAt = fromLocal(local, zone);
    const sentence = !dueAt
      ? 'Give a date and a time'
      : Date.parse(dueAt) <= serverNow().getTime()
        ? 'Choose a time that is still to come, or change it now'
        : undefined;
    setWrong(sentence);
    if (dueAt && !sentence && !plan.isPending) plan.mutate(dueAt);
  };
  const error = plan.error ?? cancel.error;
  const shownField = fieldError(plan.error, 'dueAt');
  return (
    <form onSubmit={submit} noValidate className="flex flex-col gap-4">
      {change ? (
        <div>
          <p className="font-medium">
            Planned for <DateTime at={change.dueAt} zone={zone} as="words" />
          </p>
          {why ? <p className="text-soft">{why}</p> : null}
          {change.deadlineAt ? (
            <p className="text-soft">
              It should change by <DateTime at={change.deadlineAt} zone={zone} as="words" />.
            </p>
          ) : null}
          {change.state === 'staged' ? (
            <p className="mt-2">
              Its passphrase is made already, and cards may be printed with it. Moving keeps it; cancelling
              drops it and voids those cards.
            </p>
          ) : null}
        </div>
      ) : (
        <p>Nothing is planned for this network.</p>
      )}
      {network.carriesEquipment ? (
        <Caution>This network carries equipment: choose a time in port, with the ETO.</Caution>
      ) : null}
      <TextInput
        type="datetime-local"
        label={change ? 'Move it to' : 'Change it at'}
        hint="Ship's time"
        value={local}
        onChange={(event) => setLocal(event.target.value)}
        error={wrong ?? shownField}
      />
      {change ? null : (
        <Select
          label="Why"
          value={reason}
          onChange={(event) => setReason(event.target.value as ChangeReason)}
          options={REASON_CHOICES}
        />
      )}
      {error && !(namesFields(error) && shownField) ? (
        <p role="alert" className="text-sm font-medium text-magenta">
          {sentenceFor(error)}
        </p>
      ) : null}
      <div className="flex flex-wrap items-center justify-between gap-3">
        {change && detail.data?.may.cancel ? (
          <Button
            kind="quiet"
            className="-ml-4"
            onClick={() => cancel.mutate()}
            busy={cancel.isPending && 'Cancelling…'}
          >
            Cancel this change
          </Button>
        ) : (
          <span />
        )}
        <Button type="submit" kind="primary" busy={plan.isPending && 'Saving…'}>
          {change ? 'Move it' : 'Plan it'}
        </Button>
      </div>
    </form>
  );
}
