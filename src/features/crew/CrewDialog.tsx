import { useMutation, useQueryClient } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import type { Language } from '../../../shared/api/common.ts';
import { type CrewBody, type CrewView, crewBody } from '../../../shared/api/crew.ts';
import { EMAIL_MAX, NAME_MAX } from '../../../shared/rules/limits.ts';
import { Button } from '../../components/Button.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { ErrorLine } from '../../components/ErrorLine.tsx';
import { Select, TextInput } from '../../components/inputs.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { serverNow } from '../../lib/clock.ts';
import { fieldError } from '../../lib/errors.ts';
import { checkForm } from '../../lib/forms.ts';
import { LANGUAGE_CHOICES } from '../../lib/languages.ts';
import { fromLocal, toLocal } from '../../lib/shipLocal.ts';
import { crewQuery, saveCrew } from './queries.ts';

interface CrewDialogProps {
  vesselId: string;
  zone: string;
  /** Null signs somebody on. */
  member: CrewView | null;
  onClose: () => void;
}

/** Signs somebody on, or corrects their entry. */
export function CrewDialog({ vesselId, zone, member, onClose }: CrewDialogProps) {
  const client = useQueryClient();
  const [form, setForm] = useState({
    name: member?.name ?? '',
    position: member?.position ?? '',
    department: member?.department ?? '',
    email: member?.email ?? '',
    language: member?.language ?? ('en' as Language),
    signedOn: toLocal(member?.signedOnAt ?? serverNow(), zone),
  });
  const [checked, setChecked] = useState<unknown>(null);
  const save = useMutation({
    mutationFn: (body: CrewBody) => saveCrew(vesselId, member?.id ?? null, body),
    onSuccess: async () => {
      await client.invalidateQueries({ queryKey: crewQuery(vesselId).queryKey });
      onClose();
    },
  });
  const error = checked ?? save.error;
  const set = (key: keyof typeof form) => (event: { target: { value: string } }) =>
    setForm((before) => ({ ...before, [key]: event.target.value }));
  const submit = (event: FormEvent) => {
    event.preventDefault();
    const { signedOn, ...rest } = form;
    const body = { ...rest, signedOnAt: fromLocal(signedOn, zone) ?? '' };
    const result = checkForm(crewBody, body);
    setChecked(result.ok ? null : result.error);
    if (result.ok && !save.isPending) save.mutate(body);
  };
  return (
    <Dialog
      open
      onClose={onClose}
      title={member ? <SafeText>{`Correct ${member.name}`}</SafeText> : 'Sign somebody on'}
      keepOpen
    >
      <form onSubmit={submit} noValidate className="grid gap-4 sm:grid-cols-2">
        <TextInput
          className="sm:col-span-2"
          label="Name"
          value={form.name}
          maxLength={NAME_MAX}
          autoComplete="off"
          onChange={set('name')}
          error={fieldError(error, 'name')}
        />
        <TextInput
          label="Position"
          hint="Deckhand, second engineer, …"
          value={form.position}
          maxLength={60}
          onChange={set('position')}
          error={fieldError(error, 'position')}
        />
        <TextInput
          label="Department"
          hint="Deck, interior, engine, galley"
          value={form.department}
          maxLength={60}
          onChange={set('department')}
          error={fieldError(error, 'department')}
        />
        <TextInput
          className="sm:col-span-2"
          label="Mail address"
          hint="May be left empty. With it, an account of the same address becomes theirs."
          type="email"
          value={form.email}
          maxLength={EMAIL_MAX}
          autoComplete="off"
          onChange={set('email')}
          error={fieldError(error, 'email')}
        />
        <Select
          label="Language"
          value={form.language}
          options={LANGUAGE_CHOICES}
          onChange={set('language')}
          error={fieldError(error, 'language')}
        />
        <TextInput
          label="Signed on, ship's time"
          type="datetime-local"
          value={form.signedOn}
          onChange={set('signedOn')}
          error={fieldError(error, 'signedOnAt')}
        />
        <ErrorLine error={error} fieldsShown className="sm:col-span-2" />
        <Button
          type="submit"
          kind="primary"
          className="justify-self-start"
          busy={save.isPending && 'Saving…'}
        >
          {member ? 'Save' : 'Sign on'}
        </Button>
      </form>
    </Dialog>
  );
}
