import { useMutation, useQueryClient } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import type { ArrivalsView } from '../../../shared/api/arrivals.ts';
import type { Language } from '../../../shared/api/common.ts';
import { NAME_MAX } from '../../../shared/rules/limits.ts';
import { Button } from '../../components/Button.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { ErrorLine } from '../../components/ErrorLine.tsx';
import { Checkbox, Select, TextInput } from '../../components/inputs.tsx';
import { serverNow } from '../../lib/clock.ts';
import { fieldError } from '../../lib/errors.ts';
import { LANGUAGE_CHOICES } from '../../lib/languages.ts';
import { fromLocal, toLocal } from '../../lib/shipLocal.ts';
import { addVisitor, arrivalsKey, type NewVisitor } from './queries.ts';

interface VisitorDialogProps {
  vesselId: string;
  arrivals: ArrivalsView;
  onClose: () => void;
  onAdded: (guestId: string) => void;
}

const STAY_MS = 4 * 3_600_000;

/** Someone not on the list: a photographer, a pilot, a guest of a guest. Name if wanted, and until when. */
export function VisitorDialog({ vesselId, arrivals, onClose, onAdded }: VisitorDialogProps) {
  const client = useQueryClient();
  const [name, setName] = useState('');
  const [language, setLanguage] = useState<Language>('en');
  const [under16, setUnder16] = useState(false);
  const [until, setUntil] = useState(
    () => `${toLocal(new Date(serverNow().getTime() + STAY_MS), arrivals.zone).slice(0, 14)}00`,
  );
  const [untilError, setUntilError] = useState<string | undefined>();
  const add = useMutation({
    mutationFn: (visitor: NewVisitor) => addVisitor(vesselId, visitor),
    onSuccess: async (visitor) => {
      await client.invalidateQueries({ queryKey: arrivalsKey(vesselId) });
      onAdded(visitor.id);
      onClose();
    },
  });
  const submit = (event: FormEvent) => {
    event.preventDefault();
    const untilAt = fromLocal(until, arrivals.zone);
    setUntilError(untilAt ? undefined : 'Give the date and time until which they stay');
    if (untilAt && !add.isPending) add.mutate({ name: name.trim() || null, language, under16, untilAt });
  };
  return (
    <Dialog open onClose={onClose} title="Someone not on the list" keepOpen>
      <form onSubmit={submit} noValidate className="flex flex-col gap-4">
        <TextInput
          label="Name"
          hint="May be left empty: then they are listed as a visitor with a number."
          value={name}
          maxLength={NAME_MAX}
          autoComplete="off"
          onChange={(event) => setName(event.target.value)}
          error={fieldError(add.error, 'name')}
        />
        <TextInput
          type="datetime-local"
          label="Aboard until"
          hint="Ship's time. After it they count as gone."
          value={until}
          onChange={(event) => setUntil(event.target.value)}
          error={untilError ?? fieldError(add.error, 'untilAt')}
        />
        <Select
          label="Language"
          value={language}
          onChange={(event) => setLanguage(event.target.value as Language)}
          options={LANGUAGE_CHOICES}
        />
        <Checkbox label="Under 16" checked={under16} onChange={(event) => setUnder16(event.target.checked)} />
        <ErrorLine error={add.error} fieldsShown />
        <Button type="submit" kind="primary" className="self-start" busy={add.isPending && 'Adding…'}>
          Add
        </Button>
      </form>
    </Dialog>
  );
}
