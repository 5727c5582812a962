import { useMutation, useQueryClient } from '@tanstack/react-query';
import { type FormEvent, type ReactNode, useState } from 'react';
import type { ArrivalsView, GuestView } from '../../../shared/api/arrivals.ts';
import type { Language } from '../../../shared/api/common.ts';
import { NAME_MAX } from '../../../shared/rules/limits.ts';
import { Button } from '../../components/Button.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { ErrorLine } from '../../components/ErrorLine.tsx';
import { Checkbox, Select, TextInput } from '../../components/inputs.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { fieldError } from '../../lib/errors.ts';
import { LANGUAGE_CHOICES } from '../../lib/languages.ts';
import { guestCalled } from './guestWords.ts';
import { addGuest, arrivalsKey, changeGuest, eraseGuest, type GuestChange, removeGuest } from './queries.ts';

interface GuestDialogProps {
  vesselId: string;
  arrivals: ArrivalsView;
  /** Null adds somebody to the party. */
  guest: GuestView | null;
  partyId: string | null;
  onClose: () => void;
}

/** Adds a guest to a party or corrects one. */
export function GuestDialog({ vesselId, arrivals, guest, partyId, onClose }: GuestDialogProps) {
  const client = useQueryClient();
  const { say } = useNotices();
  const [name, setName] = useState(guest?.name ?? '');
  const [withheld, setWithheld] = useState(guest !== null && guest.name === null);
  const [cabinId, setCabinId] = useState(guest?.cabin?.id ?? '');
  const [language, setLanguage] = useState<Language>(guest?.language ?? 'en');
  const [under16, setUnder16] = useState(guest?.under16 ?? false);
  const done = async (sentence: ReactNode) => {
    await client.invalidateQueries({ queryKey: arrivalsKey(vesselId) });
    say(sentence);
    onClose();
  };
  const save = useMutation({
    mutationFn: (change: GuestChange) =>
      guest ? changeGuest(vesselId, guest.id, change) : addGuest(vesselId, partyId ?? '', change),
    onSuccess: (saved) =>
      done(guest ? 'Corrected.' : <SafeText>{`${guestCalled(saved)} is on the list.`}</SafeText>),
  });
  const remove = useMutation({
    mutationFn: () => removeGuest(vesselId, guest?.id ?? ''),
    onSuccess: () => done('Taken off the list.'),
  });
  const erase = useMutation({
    mutationFn: () => eraseGuest(vesselId, guest?.id ?? ''),
    onSuccess: () => done('The name is erased, here and in the log.'),
  });
  const submit = (event: FormEvent) => {
    event.preventDefault();
    if (save.isPending) return;
    save.mutate({ name: withheld ? null : name, cabinId: cabinId || null, language, under16 });
  };
  const error = save.error ?? remove.error ?? erase.error;
  return (
    <Dialog
      open
      onClose={onClose}
      title={guest ? <SafeText>{`Correct ${guestCalled(guest)}`}</SafeText> : 'Add a guest'}
      keepOpen
    >
      <form onSubmit={submit} noValidate className="flex flex-col gap-4">
        {withheld ? null : (
          <TextInput
            label="Name"
            value={name}
            maxLength={NAME_MAX}
            autoComplete="off"
            onChange={(event) => setName(event.target.value)}
            error={fieldError(error, 'name')}
          />
        )}
        <Checkbox
          label="Without a name"
          hint="Listed as “Guest” with a number. The log then has no name either."
          checked={withheld}
          onChange={(event) => setWithheld(event.target.checked)}
        />
        {partyId ? (
          <Select
            label="Cabin"
            value={cabinId}
            onChange={(event) => setCabinId(event.target.value)}
            options={[
              { value: '', label: 'No cabin yet' },
              ...arrivals.cabins.map(({ id, name: cabin, deck }) => ({
                value: id,
                label: `${cabin}, ${deck}`,
              })),
            ]}
            error={fieldError(error, 'cabinId')}
          />
        ) : null}
        <Select
          label="Language"
          value={language}
          onChange={(event) => setLanguage(event.target.value as Language)}
          options={LANGUAGE_CHOICES}
        />
        <Checkbox label="Under 16" checked={under16} onChange={(event) => setUnder16(event.target.checked)} />
        <ErrorLine error={error} fieldsShown />
        <div className="flex flex-wrap items-center gap-3">
          <Button type="submit" kind="primary" busy={save.isPending && 'Saving…'}>
            {guest ? 'Save' : 'Add'}
          </Button>
          {guest && !guest.handover && guest.partyId ? (
            <Button kind="quiet" onClick={() => remove.mutate()} busy={remove.isPending && 'Taking off…'}>
              Take off the list
            </Button>
          ) : null}
          {guest?.name ? (
            <Button kind="quiet" onClick={() => erase.mutate()} busy={erase.isPending && 'Erasing…'}>
              Erase the name for good
            </Button>
          ) : null}
        </div>
      </form>
    </Dialog>
  );
}
