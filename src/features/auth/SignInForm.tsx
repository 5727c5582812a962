import { useMutation } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import { Link } from 'react-router-dom';
import { EMAIL_MAX, PASSWORD_MAX } from '../../../shared/rules/limits.ts';
import { Button } from '../../components/Button.tsx';
import { TextInput } from '../../components/inputs.tsx';
import { ApiError, fieldError } from '../../lib/errors.ts';
import { CodeField } from './CodeField.tsx';
import { FormError } from './FormError.tsx';
import { signIn } from './queries.ts';

/**
 * Mail and password, then the second factor's code when the server asks for it. Between the two the password is
 * only in this form.
 */
export function SignInForm({ onDone }: { onDone: (done: { endedOldest: boolean }) => void }) {
  const [email, setEmail] = useState('');
  const [password, setPassword] = useState('');
  const [code, setCode] = useState('');
  const [step, setStep] = useState<'password' | 'code'>('password');
  const attempt = useMutation({
    mutationFn: signIn,
    onSuccess: onDone,
    onError: (error) => {
      if (error instanceof ApiError && error.code === 'code_needed') setStep('code');
    },
  });
  const asksCode = attempt.error instanceof ApiError && attempt.error.code === 'code_needed';
  const error = asksCode && code === '' ? null : attempt.error;

  const submit = (event: FormEvent) => {
    event.preventDefault();
    if (attempt.isPending) return;
    attempt.mutate(step === 'code' ? { email, password, code: code.trim() } : { email, password });
  };

  return (
    <form onSubmit={submit} noValidate className="flex w-full flex-col gap-5">
      {step === 'password' ? (
        <>
          <TextInput
            label="Mail address"
            type="email"
            autoComplete="username"
            inputMode="email"
            maxLength={EMAIL_MAX}
            required
            value={email}
            onChange={(event) => setEmail(event.target.value)}
            error={fieldError(error, 'email')}
          />
          <TextInput
            label="Password"
            type="password"
            autoComplete="current-password"
            maxLength={PASSWORD_MAX}
            required
            value={password}
            onChange={(event) => setPassword(event.target.value)}
            error={fieldError(error, 'password')}
          />
        </>
      ) : (
        <CodeField value={code} onChange={setCode} error={fieldError(error, 'code')} focused />
      )}
      <FormError error={error} />
      <Button type="submit" kind="primary" size="large" busy={attempt.isPending && 'Signing in…'}>
        Sign in
      </Button>
      {step === 'password' ? (
        <Link to="/reset" className="self-start py-2 text-deep underline underline-offset-4">
          I forgot my password
        </Link>
      ) : (
        <Button
          kind="quiet"
          className="self-start"
          onClick={() => {
            setStep('password');
            setCode('');
            attempt.reset();
          }}
        >
          Start again with another address
        </Button>
      )}
    </form>
  );
}
