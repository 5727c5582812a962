import { type FormEvent, useState } from 'react';
import type { AcceptInvitation, InvitationView } from '../../../shared/api/auth.ts';
import type { Language } from '../../../shared/api/common.ts';
import { NAME_MAX, PASSWORD_MAX } from '../../../shared/rules/limits.ts';
import { Button } from '../../components/Button.tsx';
import { Select, TextInput } from '../../components/inputs.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { fieldError } from '../../lib/errors.ts';
import { OWN_LANGUAGE_CHOICES } from '../../lib/languages.ts';
import { rolesInWords } from '../../lib/roleWords.ts';
import { FormError } from './FormError.tsx';
import { NewPasswordField } from './NewPasswordField.tsx';

interface InvitationFormProps {
  invitation: InvitationView;
  error: unknown;
  busy: boolean;
  onAccept: (given: Omit<AcceptInvitation, 'token'>) => void;
}

/** Accepts an invitation: one press for somebody already known here, name and password for somebody new. */
export function InvitationForm({ invitation, error, busy, onAccept }: InvitationFormProps) {
  const [name, setName] = useState('');
  const [password, setPassword] = useState('');
  const [locale, setLocale] = useState<Language>('en');
  const submit = (event: FormEvent) => {
    event.preventDefault();
    if (!busy) onAccept(invitation.known ? { password } : { name, password, locale });
  };
  return (
    <form onSubmit={submit} noValidate className="flex w-full flex-col gap-5">
      <p>
        As {rolesInWords(invitation.roles)}, with the address <SafeText>{invitation.email}</SafeText>.
        {invitation.known
          ? ' You already have an account here. Give its password to accept; nothing else about it changes.'
          : null}
      </p>
      <input type="text" autoComplete="username" value={invitation.email} readOnly hidden />
      {invitation.known ? (
        <TextInput
          label="Your password"
          type="password"
          autoComplete="current-password"
          maxLength={PASSWORD_MAX}
          value={password}
          onChange={(event) => setPassword(event.target.value)}
          error={fieldError(error, 'password')}
        />
      ) : (
        <>
          <TextInput
            label="Your name"
            hint="As it will stand in the log beside what you do."
            autoComplete="name"
            maxLength={NAME_MAX}
            value={name}
            onChange={(event) => setName(event.target.value)}
            error={fieldError(error, 'name')}
          />
          <Select
            label="Language of mails to you"
            options={OWN_LANGUAGE_CHOICES}
            value={locale}
            onChange={(event) => setLocale(event.target.value as Language)}
            error={fieldError(error, 'locale')}
          />
          <NewPasswordField
            label="Password"
            value={password}
            onChange={setPassword}
            error={fieldError(error, 'password')}
          />
        </>
      )}
      <FormError error={error} />
      <Button type="submit" kind="primary" size="large" busy={busy && 'Accepting…'}>
        Accept
      </Button>
    </form>
  );
}
