import { useMutation } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import { Link } from 'react-router-dom';
import { Button } from '../components/Button.tsx';
import { buttonLook } from '../components/buttonLook.ts';
import { PlainFrame } from '../components/PlainFrame.tsx';
import { FormError } from '../features/auth/FormError.tsx';
import { NewPasswordField } from '../features/auth/NewPasswordField.tsx';
import { setNewPassword } from '../features/auth/queries.ts';
import { fieldError } from '../lib/errors.ts';
import { takeFragmentToken } from '../lib/fragment.ts';
import { useTitle } from '../lib/useTitle.ts';

/** `/reset/new#token` */
export function ResetPage() {
  const [token] = useState(takeFragmentToken);
  const [password, setPassword] = useState('');
  const set = useMutation({ mutationFn: setNewPassword });
  useTitle('New password');
  const submit = (event: FormEvent) => {
    event.preventDefault();
    if (!set.isPending) set.mutate({ token, password });
  };
  if (!token) {
    return (
      <PlainFrame title="This link is not whole.">
        <p>
          The mail program may have cut it. Open the mail again and press the link there, or ask for a new
          one.
        </p>
        <Link to="/reset" className={buttonLook('primary')}>
          Ask for a new link
        </Link>
      </PlainFrame>
    );
  }
  if (set.isSuccess) {
    return (
      <PlainFrame title="Your new password is set.">
        <p>Every device that was signed in with the old one has been signed out.</p>
        <Link to="/sign-in" className={buttonLook('primary')}>
          Sign in
        </Link>
      </PlainFrame>
    );
  }
  return (
    <PlainFrame title="Set a new password">
      <form onSubmit={submit} noValidate className="flex w-full flex-col gap-5">
        <NewPasswordField value={password} onChange={setPassword} error={fieldError(set.error, 'password')} />
        <FormError error={set.error} />
        <Button type="submit" kind="primary" size="large" busy={set.isPending && 'Saving…'}>
          Set the password
        </Button>
      </form>
    </PlainFrame>
  );
}
