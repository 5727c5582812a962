import { useMutation } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import { Link } from 'react-router-dom';
import { EMAIL_MAX } from '../../shared/rules/limits.ts';
import { Button } from '../components/Button.tsx';
import { TextInput } from '../components/inputs.tsx';
import { PlainFrame } from '../components/PlainFrame.tsx';
import { SafeText } from '../components/SafeText.tsx';
import { FormError } from '../features/auth/FormError.tsx';
import { askForReset } from '../features/auth/queries.ts';
import { fieldError } from '../lib/errors.ts';
import { useTitle } from '../lib/useTitle.ts';

/** `/reset` */
export function ResetRequestPage() {
  const [email, setEmail] = useState('');
  const [missing, setMissing] = useState<string | undefined>();
  const ask = useMutation({ mutationFn: askForReset });
  useTitle('New password');
  const submit = (event: FormEvent) => {
    event.preventDefault();
    const given = email.trim();
    setMissing(given === '' ? 'Give the mail address you sign in with' : undefined);
    if (given !== '' && !ask.isPending) ask.mutate({ email: given });
  };
  if (ask.isSuccess) {
    return (
      <PlainFrame title="Look in your mailbox.">
        <p>
          If <SafeText>{email}</SafeText> belongs to somebody here, a mail with a link is on its way. The link
          works once, for 15 minutes. If nothing comes, look in the junk folder, or ask your captain or dealer
          which address they invited.
        </p>
        <Link to="/sign-in" className="py-2 text-deep underline underline-offset-4">
          Back to signing in
        </Link>
      </PlainFrame>
    );
  }
  return (
    <PlainFrame title="Set a new password">
      <p>Give the address you sign in with. You get a mail with a link that lets you set a new password.</p>
      <form onSubmit={submit} noValidate className="flex w-full flex-col gap-5">
        <TextInput
          label="Mail address"
          type="email"
          autoComplete="username"
          inputMode="email"
          maxLength={EMAIL_MAX}
          required
          value={email}
          onChange={(event) => setEmail(event.target.value)}
          error={missing ?? fieldError(ask.error, 'email')}
        />
        <FormError error={ask.error} />
        <Button type="submit" kind="primary" size="large" busy={ask.isPending && 'Sending…'}>
          Send me the link
        </Button>
        <Link to="/sign-in" className="self-start py-2 text-deep underline underline-offset-4">
          Back to signing in
        </Link>
      </form>
    </PlainFrame>
  );
}
