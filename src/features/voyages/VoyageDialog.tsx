import { useMutation } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import type { VoyageKind } from '../../../shared/api/common.ts';
import type { VoyageForm, VoyageView } from '../../../shared/api/voyages.ts';
import { NAME_MAX } from '../../../shared/rules/limits.ts';
import { VOYAGE_KIND_NAMES } from '../../../shared/rules/voyageKinds.ts';
import { Button } from '../../components/Button.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { ErrorLine } from '../../components/ErrorLine.tsx';
import { Select, TextInput } from '../../components/inputs.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { type ApiError, fieldError } from '../../lib/errors.ts';
import { useFocusInvalid } from '../../lib/useFocusInvalid.ts';
import { removeVoyage, saveVoyage } from './queries.ts';
import { draftOf, newDraft, type VoyageDraft, voyageOf } from './voyageDraft.ts';

const KINDS = Object.entries(VOYAGE_KIND_NAMES).map(([value, label]) => ({ value, label }));

interface VoyageDialogProps {
  vesselId: string;
  zone: string;
  /** Null adds one. */
  voyage: VoyageView | null;
  onClose: () => void;
}

/** Adds a voyage to the calendar, corrects one or takes it off; planned changes follow. */
export function VoyageDialog({ vesselId, zone, voyage, onClose }: VoyageDialogProps) {
  const { say } = useNotices();
  const [draft, setDraft] = useState<VoyageDraft>(() => (voyage ? draftOf(voyage, zone) : newDraft(zone)));
  const [wrong, setWrong] = useState<ApiError | null>(null);
  const [removing, setRemoving] = useState(false);
  const done = (sentence: string) => {
    say(sentence);
    onClose();
  };
  const save = useMutation({
    mutationFn: (given: VoyageForm) => saveVoyage(vesselId, voyage?.id ?? null, given),
    onSuccess: () => done(voyage ? 'Corrected. Planned changes follow.' : 'It is on the calendar.'),
  });
  const remove = useMutation({
    mutationFn: (id: string) => removeVoyage(vesselId, id),
    onSuccess: () => done('It is off the calendar. Planned changes follow.'),
  });
  const error = wrong ?? save.error ?? remove.error;
  const form = useFocusInvalid(error);
  const box = (key: Exclude<keyof VoyageDraft, 'kind'>, path: string = key) => ({
    value: draft[key],
    autoComplete: 'off',
    onChange: (event: { target: { value: string } }) =>
      setDraft((before) => ({ ...before, [key]: event.target.value })),
    error: fieldError(error, path),
  });
  const submit = (event: FormEvent) => {
    event.preventDefault();
    const read = voyageOf(draft, zone);
    setWrong(read.ok ? null : read.error);
    if (read.ok && !save.isPending) save.mutate(read.voyage);
  };
  return (
    <Dialog
      open
      onClose={onClose}
      title={voyage ? <SafeText>{`Correct ${voyage.title}`}</SafeText> : 'Add to the calendar'}
      keepOpen
    >
      <form ref={form} onSubmit={submit} noValidate className="grid gap-4 sm:grid-cols-2">
        <Select
          label="What it is"
          value={draft.kind}
          options={KINDS}
          onChange={(event) => setDraft((before) => ({ ...before, kind: event.target.value as VoyageKind }))}
          error={fieldError(error, 'kind')}
          className="sm:col-span-2"
        />
        <TextInput
          {...box('title')}
          label="Called"
          placeholder={VOYAGE_KIND_NAMES[draft.kind]}
          maxLength={NAME_MAX}
          hint="May be left empty. Those who may not see guests read only what it is."
          className="sm:col-span-2"
        />
        <TextInput {...box('starts', 'startsAt')} type="datetime-local" label="Begins, ship's time" />
        <TextInput {...box('ends', 'endsAt')} type="datetime-local" label="Ends, ship's time" />
        <TextInput {...box('fromPort')} label="From" maxLength={NAME_MAX} hint="A port. May be left empty." />
        <TextInput {...box('toPort')} label="To" maxLength={NAME_MAX} hint="A port. May be left empty." />
        <ErrorLine error={error} fieldsShown className="sm:col-span-2" />
        {voyage && removing ? (
          <div className="flex flex-wrap items-center justify-end gap-3 sm:col-span-2">
            <p className="grow">Its parties stay on their lists, and planned changes follow.</p>
            <Button onClick={() => setRemoving(false)}>Keep it</Button>
            <Button
              kind="attention"
              onClick={() => remove.mutate(voyage.id)}
              busy={remove.isPending && 'Taking it off…'}
            >
              Take it off
            </Button>
          </div>
        ) : (
          <div className="flex flex-wrap items-center gap-3 sm:col-span-2">
            <Button type="submit" kind="primary" busy={save.isPending && 'Saving…'}>
              {voyage ? 'Save' : 'Add it'}
            </Button>
            {voyage ? (
              <Button kind="quiet" onClick={() => setRemoving(true)}>
                Take it off the calendar
              </Button>
            ) : null}
          </div>
        )}
      </form>
    </Dialog>
  );
}
