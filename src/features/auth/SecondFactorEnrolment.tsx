import { useMutation, useQueryClient } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import type { Enrolment } from '../../../shared/api/auth.ts';
import { Button } from '../../components/Button.tsx';
import { QrCode } from '../../components/QrCode.tsx';
import { fieldError } from '../../lib/errors.ts';
import { CodeField } from './CodeField.tsx';
import { FormError } from './FormError.tsx';
import { finishSecondFactor, sessionQuery } from './queries.ts';

/** Groups of four, as people read a secret out of a screen. */
function grouped(secret: string): string {
  return secret.match(/.{1,4}/g)?.join(' ') ?? secret;
}

interface SecondFactorEnrolmentProps {
  enrolment: Enrolment;
  onDone: () => void;
}

/** Three steps: scan, give a code, keep the recovery codes. */
export function SecondFactorEnrolment({ enrolment, onDone }: SecondFactorEnrolmentProps) {
  const client = useQueryClient();
  const [code, setCode] = useState('');
  const finish = useMutation({ mutationFn: finishSecondFactor, gcTime: 0 });
  const done = async () => {
    await client.invalidateQueries({ queryKey: sessionQuery.queryKey });
    onDone();
  };
  if (finish.data) return <RecoveryCodes codes={finish.data.recoveryCodes} onKept={() => void done()} />;
  const submit = (event: FormEvent) => {
    event.preventDefault();
    if (!finish.isPending) finish.mutate({ code: code.trim() });
  };
  return (
    <form onSubmit={submit} noValidate className="flex max-w-xl flex-col items-start gap-4">
      <p>Scan this with your authenticator app, then give the code it shows.</p>
      <QrCode
        text={enrolment.uri}
        label="Code for your authenticator app"
        className="w-56 border border-rule"
      />
      <p className="text-sm text-soft">
        No camera? Type this into the app instead:{' '}
        <span className="font-medium break-all text-ink">{grouped(enrolment.secret)}</span>
      </p>
      <div className="w-full max-w-xs">
        <CodeField
          value={code}
          onChange={setCode}
          error={fieldError(finish.error, 'code')}
          recovery={false}
        />
      </div>
      <FormError error={finish.error} />
      <div className="flex flex-wrap gap-3">
        <Button type="submit" kind="primary" busy={finish.isPending && 'Checking…'}>
          Switch it on
        </Button>
        <Button onClick={onDone}>Not now</Button>
      </div>
    </form>
  );
}

function RecoveryCodes({ codes, onKept }: { codes: readonly string[]; onKept: () => void }) {
  return (
    <div className="flex max-w-xl flex-col items-start gap-4">
      <p className="text-lg font-medium">The second factor is on. Write these down now.</p>
      <p>
        Each code signs you in once if your phone is lost. They are shown this one time; keep them on paper,
        away from this device.
      </p>
      <ul className="grid gap-x-8 gap-y-1 border-y border-rule py-3 sm:grid-cols-2" translate="no">
        {codes.map((code) => (
          <li key={code} className="font-medium break-all">
            {code}
          </li>
        ))}
      </ul>
      <Button kind="primary" onClick={onKept}>
        I have written them down
      </Button>
    </div>
  );
}
