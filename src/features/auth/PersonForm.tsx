import { useMutation, useQueryClient } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import type { Language } from '../../../shared/api/common.ts';
import type { SessionView } from '../../../shared/api/session.ts';
import { NAME_MAX } from '../../../shared/rules/limits.ts';
import { Button } from '../../components/Button.tsx';
import { Select, TextInput } from '../../components/inputs.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { fieldError } from '../../lib/errors.ts';
import { OWN_LANGUAGE_CHOICES } from '../../lib/languages.ts';
import { FormError } from './FormError.tsx';
import { savePerson, sessionQuery } from './queries.ts';

/** A person's own name and language. */
export function PersonForm({ person }: { person: SessionView['person'] }) {
  const client = useQueryClient();
  const notices = useNotices();
  const [name, setName] = useState(person.name);
  const [locale, setLocale] = useState(person.locale);
  const save = useMutation({
    mutationFn: savePerson,
    onSuccess: async () => {
      await client.invalidateQueries({ queryKey: sessionQuery.queryKey, exact: true });
      notices.say('Saved.');
    },
  });
  const submit = (event: FormEvent) => {
    event.preventDefault();
    if (!save.isPending) save.mutate({ name, locale });
  };
  return (
    <form onSubmit={submit} noValidate className="flex max-w-md flex-col gap-4">
      <TextInput
        label="Name"
        hint="As it stands in the log beside what you do."
        autoComplete="name"
        maxLength={NAME_MAX}
        value={name}
        onChange={(event) => setName(event.target.value)}
        error={fieldError(save.error, 'name')}
      />
      <Select
        label="Language"
        hint="For mails to you. Screens are in English for now."
        options={OWN_LANGUAGE_CHOICES}
        value={locale}
        onChange={(event) => setLocale(event.target.value as Language)}
        error={fieldError(save.error, 'locale')}
      />
      <p className="text-sm text-soft">You sign in with {person.email}.</p>
      <FormError error={save.error} />
      <Button type="submit" className="self-start" busy={save.isPending && 'Saving…'}>
        Save
      </Button>
    </form>
  );
}
