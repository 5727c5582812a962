import { useMutation, useQuery, useQueryClient } from '@tanstack/react-query';
import { type FormEvent, type ReactNode, useCallback, useEffect, useRef, useState } from 'react';
import { PASSWORD_MAX } from '../../../shared/rules/limits.ts';
import { Button } from '../../components/Button.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { TextInput } from '../../components/inputs.tsx';
import { onStepUp } from '../../lib/api.ts';
import { fieldError } from '../../lib/errors.ts';
import { CodeField } from './CodeField.tsx';
import { FormError } from './FormError.tsx';
import { proveIdentity, sessionQuery } from './queries.ts';

type Answer = (proved: boolean) => void;

/**
 * Asks "is it you?" when the server wants a fresh proof, whatever was being done; the call then repeats itself.
 * Several calls that are refused at once share one question.
 */
export function StepUpProvider({ children }: { children: ReactNode }) {
  const [open, setOpen] = useState(false);
  const waiting = useRef<Answer[]>([]);

  const answer = useCallback((proved: boolean) => {
    setOpen(false);
    for (const resolve of waiting.current.splice(0)) resolve(proved);
  }, []);

  useEffect(() => {
    onStepUp(
      () =>
        new Promise<boolean>((resolve) => {
          waiting.current.push(resolve);
          setOpen(true);
        }),
    );
    return () => onStepUp(null);
  }, []);

  return (
    <>
      {children}
      {open ? <StepUpDialog onAnswer={answer} /> : null}
    </>
  );
}

function StepUpDialog({ onAnswer }: { onAnswer: Answer }) {
  const { data: session } = useQuery({ ...sessionQuery, enabled: false });
  const client = useQueryClient();
  const enrolled = session?.secondFactor.enrolled ?? false;
  const [password, setPassword] = useState('');
  const [code, setCode] = useState('');
  const proof = useMutation({
    mutationFn: async (given: { password: string; code?: string }) => {
      await proveIdentity(given);
      // The proof gives the session a new id, and with it a new token for what is repeated next.
      await client.fetchQuery({ ...sessionQuery, staleTime: 0 });
    },
    onSuccess: () => onAnswer(true),
  });

  const submit = (event: FormEvent) => {
    event.preventDefault();
    if (!proof.isPending) proof.mutate(enrolled ? { password, code: code.trim() } : { password });
  };

  return (
    <Dialog open onClose={() => onAnswer(false)} title="Confirm it is you" keepOpen>
      <form onSubmit={submit} noValidate className="flex flex-col gap-4">
        <p>What you are about to do needs a fresh proof that it is really you. It holds for ten minutes.</p>
        <input type="text" autoComplete="username" value={session?.person.email ?? ''} readOnly hidden />
        <TextInput
          label="Password"
          type="password"
          autoComplete="current-password"
          maxLength={PASSWORD_MAX}
          required
          value={password}
          onChange={(event) => setPassword(event.target.value)}
          error={fieldError(proof.error, 'password')}
        />
        {enrolled ? (
          <CodeField value={code} onChange={setCode} error={fieldError(proof.error, 'code')} />
        ) : null}
        <FormError error={proof.error} />
        <div className="flex flex-wrap justify-end gap-3">
          <Button onClick={() => onAnswer(false)}>Leave it</Button>
          <Button type="submit" kind="primary" busy={proof.isPending && 'Checking…'}>
            Confirm
          </Button>
        </div>
      </form>
    </Dialog>
  );
}
