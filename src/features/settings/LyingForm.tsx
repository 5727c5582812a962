import { useMutation } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import type { Source } from '../../../shared/api/common.ts';
import { changeSource, type VesselSettings } from '../../../shared/api/vessels.ts';
import { NAME_MAX } from '../../../shared/rules/limits.ts';
import { Button } from '../../components/Button.tsx';
import { RadioRow, TextInput } from '../../components/inputs.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { fieldError, namesFields, sentenceFor } from '../../lib/errors.ts';
import { checkForm } from '../../lib/forms.ts';
import { saveSource } from './queries.ts';

/** What each source means for those aboard (common practice of the trade, no source). */
const SOURCES: readonly { value: Source; label: string; hint: string }[] = [
  {
    value: 'dock',
    label: 'Dock',
    hint: 'Shared with the whole quay, so others may listen: cards and the arrivals screen say so.',
  },
  { value: 'cellular', label: 'Cellular', hint: 'Her own link, to about twenty miles from the tower.' },
  {
    value: 'satellite',
    label: 'Satellite',
    hint: 'Nearly everywhere, slow and dear: one video stream at a time is a usual limit.',
  },
];

/** Where she lies and what feeds her just now; every officer may say so, since it changes with each passage. */
export function LyingForm({ settings }: { settings: VesselSettings }) {
  const { say } = useNotices();
  const [typed, setTyped] = useState<{ lying?: string; source?: Source }>({});
  const [checked, setChecked] = useState<unknown>(null);
  const lying = typed.lying ?? settings.lying ?? '';
  const source = typed.source ?? settings.source;
  const save = useMutation({
    mutationFn: () => saveSource(settings.id, { source, lying }),
    onSuccess: () => {
      setTyped({});
      say('Saved.');
    },
  });
  const error = checked ?? save.error;
  const submit = (event: FormEvent) => {
    event.preventDefault();
    const result = changeSource.body ? checkForm(changeSource.body, { source, lying }) : null;
    setChecked(result?.ok === false ? result.error : null);
    if (result?.ok && !save.isPending) save.mutate();
  };
  const isChanged = lying !== (settings.lying ?? '') || source !== settings.source;
  return (
    <form onSubmit={submit} noValidate className="flex max-w-2xl flex-col items-start gap-4">
      <TextInput
        className="w-full"
        label="Lying"
        hint="Port and berth, or the anchorage. Shown at the head of every page."
        value={lying}
        maxLength={NAME_MAX}
        autoComplete="off"
        onChange={(event) => setTyped((before) => ({ ...before, lying: event.target.value }))}
        error={fieldError(error, 'lying')}
      />
      <RadioRow<Source>
        label="What feeds the boat just now"
        name="source"
        value={source}
        options={SOURCES}
        onChange={(value) => setTyped((before) => ({ ...before, source: value }))}
        error={fieldError(error, 'source')}
      />
      {error && !namesFields(error) ? (
        <p role="alert" className="text-sm font-medium text-magenta">
          {sentenceFor(error)}
        </p>
      ) : null}
      <Button type="submit" kind={isChanged ? 'primary' : 'secondary'} busy={save.isPending && 'Saving…'}>
        Save
      </Button>
    </form>
  );
}
