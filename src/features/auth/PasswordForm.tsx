import { useMutation, useQueryClient } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import { PASSWORD_MAX } from '../../../shared/rules/limits.ts';
import { Button } from '../../components/Button.tsx';
import { TextInput } from '../../components/inputs.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { fieldError } from '../../lib/errors.ts';
import { FormError } from './FormError.tsx';
import { NewPasswordField } from './NewPasswordField.tsx';
import { changePassword, sessionQuery } from './queries.ts';

/** Changes the password of the person signed in. */
export function PasswordForm({ email }: { email: string }) {
  const client = useQueryClient();
  const notices = useNotices();
  const [current, setCurrent] = useState('');
  const [password, setPassword] = useState('');
  const change = useMutation({
    mutationFn: changePassword,
    onSuccess: async () => {
      setCurrent('');
      setPassword('');
      await client.invalidateQueries({ queryKey: sessionQuery.queryKey });
      notices.say('Your password is changed. Your other devices have been signed out.');
    },
  });
  const submit = (event: FormEvent) => {
    event.preventDefault();
    if (!change.isPending) change.mutate({ current, password });
  };
  return (
    <form onSubmit={submit} noValidate className="flex max-w-md flex-col gap-4">
      <input type="text" autoComplete="username" value={email} readOnly hidden />
      <TextInput
        label="Password today"
        type="password"
        autoComplete="current-password"
        maxLength={PASSWORD_MAX}
        value={current}
        onChange={(event) => setCurrent(event.target.value)}
        error={fieldError(change.error, 'current')}
      />
      <NewPasswordField
        value={password}
        onChange={setPassword}
        error={fieldError(change.error, 'password')}
      />
      <FormError error={change.error} />
      <Button type="submit" className="self-start" busy={change.isPending && 'Changing…'}>
        Change the password
      </Button>
    </form>
  );
}
