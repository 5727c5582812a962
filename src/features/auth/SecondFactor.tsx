import { useMutation, useQueryClient } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import type { SessionView } from '../../../shared/api/session.ts';
import { PASSWORD_MAX } from '../../../shared/rules/limits.ts';
import { Button } from '../../components/Button.tsx';
import { Caution } from '../../components/Caution.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { TextInput } from '../../components/inputs.tsx';
import { fieldError } from '../../lib/errors.ts';
import { CodeField } from './CodeField.tsx';
import { FormError } from './FormError.tsx';
import { beginSecondFactor, removeSecondFactor, sessionQuery } from './queries.ts';
import { SecondFactorEnrolment } from './SecondFactorEnrolment.tsx';

/** Whether a second factor is set up, and the ways to set it up or take it away. */
export function SecondFactor({ state }: { state: SessionView['secondFactor'] }) {
  const [removing, setRemoving] = useState(false);
  const begin = useMutation({ mutationFn: beginSecondFactor, gcTime: 0 });
  if (begin.data) return <SecondFactorEnrolment enrolment={begin.data} onDone={begin.reset} />;
  if (state.enrolled) {
    return (
      <div className="flex max-w-xl flex-col items-start gap-4">
        <p>Signing in asks for a code from your authenticator app as well as your password.</p>
        {state.required ? (
          <p className="text-sm text-soft">Your role asks for it, so it can be replaced but not left out.</p>
        ) : null}
        <Button onClick={() => setRemoving(true)}>Take it away</Button>
        <RemoveDialog open={removing} onClose={() => setRemoving(false)} />
      </div>
    );
  }
  return (
    <div className="flex max-w-xl flex-col items-start gap-4">
      {state.required ? (
        <Caution>
          Your role asks for a second factor. Until it is set up, pages with passphrases stay closed to you.
        </Caution>
      ) : null}
      <p>
        With a second factor, a stolen password alone opens nothing. You need an authenticator app on your
        phone; it works without a connection.
      </p>
      <FormError error={begin.error} />
      <Button
        kind={state.required ? 'primary' : 'secondary'}
        onClick={() => begin.mutate()}
        busy={begin.isPending && 'Preparing…'}
      >
        Set it up
      </Button>
    </div>
  );
}

function RemoveDialog({ open, onClose }: { open: boolean; onClose: () => void }) {
  const client = useQueryClient();
  const [password, setPassword] = useState('');
  const [code, setCode] = useState('');
  const remove = useMutation({
    mutationFn: removeSecondFactor,
    onSuccess: async () => {
      await client.invalidateQueries({ queryKey: sessionQuery.queryKey });
      onClose();
    },
  });
  const submit = (event: FormEvent) => {
    event.preventDefault();
    if (!remove.isPending) remove.mutate({ password, code: code.trim() });
  };
  return (
    <Dialog open={open} onClose={onClose} title="Take the second factor away" keepOpen>
      <form onSubmit={submit} noValidate className="flex flex-col gap-4">
        <p>Afterwards your password alone is enough to sign in, and your recovery codes stop working.</p>
        <TextInput
          label="Password"
          type="password"
          autoComplete="current-password"
          maxLength={PASSWORD_MAX}
          value={password}
          onChange={(event) => setPassword(event.target.value)}
          error={fieldError(remove.error, 'password')}
        />
        <CodeField value={code} onChange={setCode} error={fieldError(remove.error, 'code')} />
        <FormError error={remove.error} />
        <div className="flex flex-wrap justify-end gap-3">
          <Button onClick={onClose}>Keep it</Button>
          <Button type="submit" kind="attention" busy={remove.isPending && 'Taking away…'}>
            Take it away
          </Button>
        </div>
      </form>
    </Dialog>
  );
}
