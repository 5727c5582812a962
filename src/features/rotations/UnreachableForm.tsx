import { useMutation } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import type { RotationView } from '../../../shared/api/rotations.ts';
import { NOTE_MAX } from '../../../shared/rules/limits.ts';
import { Button } from '../../components/Button.tsx';
import { TextInput } from '../../components/inputs.tsx';
import { fieldError, sentenceFor } from '../../lib/errors.ts';
import { reportUnreachable } from './queries.ts';

interface UnreachableFormProps {
  vesselId: string;
  rotationId: string;
  accessPointId: string;
  onClose: () => void;
  onDone: (rotation: RotationView) => void;
}

/** Says that an access point cannot be reached just now, and why; the change then waits for somebody there. */
export function UnreachableForm({
  vesselId,
  rotationId,
  accessPointId,
  onClose,
  onDone,
}: UnreachableFormProps) {
  const [note, setNote] = useState('');
  const report = useMutation({
    mutationFn: () => reportUnreachable(vesselId, rotationId, accessPointId, note.trim()),
    onSuccess: onDone,
  });
  const submit = (event: FormEvent) => {
    event.preventDefault();
    if (!report.isPending) report.mutate();
  };
  const field = fieldError(report.error, 'note');
  return (
    <form onSubmit={submit} noValidate className="flex flex-col gap-3">
      <p className="text-sm">
        The others can be confirmed meanwhile. This one keeps what it runs, and the change is not finished
        until it is confirmed too.
      </p>
      <TextInput
        label="Why"
        hint="May be left empty. Others aboard read it. Never the passphrase."
        value={note}
        maxLength={NOTE_MAX}
        autoComplete="off"
        onChange={(event) => setNote(event.target.value)}
        error={field ?? (report.error ? sentenceFor(report.error) : undefined)}
      />
      <div className="flex flex-wrap justify-end gap-3">
        <Button onClick={onClose}>Back</Button>
        <Button type="submit" busy={report.isPending && 'Saving…'}>
          It cannot be reached
        </Button>
      </div>
    </form>
  );
}
