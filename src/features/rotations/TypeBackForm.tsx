import { useMutation } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import type { RotationView } from '../../../shared/api/rotations.ts';
import { PASSPHRASE_MAX } from '../../../shared/rules/limits.ts';
import { Button } from '../../components/Button.tsx';
import { Checkbox, TextInput } from '../../components/inputs.tsx';
import { cx } from '../../lib/cx.ts';
import { fieldError, sentenceFor } from '../../lib/errors.ts';

interface TypeBackFormProps {
  /** The access point's name, read out with the box. */
  name: string;
  /** Sends what was typed. */
  send: (typed: string) => Promise<RotationView>;
  onDone: (rotation: RotationView) => void;
  /** The box has been entered: what is to be typed back must not be on the screen meanwhile. */
  onStart: () => void;
  button: string;
}

/**
 * The passphrase typed back without seeing it, which catches the typing error that would lock everybody out. What
 * is typed is covered unless the person asks to see it, and pasting is refused because it would prove nothing.
 */
export function TypeBackForm({ name, send, onDone, onStart, button }: TypeBackFormProps) {
  const [typed, setTyped] = useState('');
  const [shown, setShown] = useState(false);
  const [pasted, setPasted] = useState(false);
  const confirm = useMutation({
    mutationFn: () => send(typed),
    onSuccess: (rotation) => {
      setTyped('');
      onDone(rotation);
    },
  });
  const submit = (event: FormEvent) => {
    event.preventDefault();
    if (typed !== '' && !confirm.isPending) confirm.mutate();
  };
  const refused = confirm.error
    ? (fieldError(confirm.error, 'typed') ?? sentenceFor(confirm.error))
    : undefined;
  return (
    <form onSubmit={submit} noValidate autoComplete="off" className="flex flex-col gap-2">
      <TextInput
        label={`Type it back, as you entered it at ${name}`}
        hint="From memory or from the access point's own page. It is hidden above while you type."
        value={typed}
        maxLength={PASSPHRASE_MAX + 20}
        autoComplete="off"
        autoCapitalize="none"
        autoCorrect="off"
        spellCheck={false}
        boxClassName={cx('[font-variant-ligatures:none]', !shown && '[-webkit-text-security:disc]')}
        onFocus={onStart}
        onChange={(event) => {
          setTyped(event.target.value);
          setPasted(false);
          if (confirm.error) confirm.reset();
        }}
        onPaste={(event) => {
          event.preventDefault();
          setPasted(true);
        }}
        error={
          pasted ? 'Type it rather than pasting it: a pasted one would not show a typing error.' : refused
        }
      />
      <div className="flex flex-wrap items-center justify-between gap-x-4">
        <Checkbox
          label="Show what I type"
          checked={shown}
          onChange={(event) => setShown(event.target.checked)}
        />
        <Button type="submit" kind="primary" disabled={typed === ''} busy={confirm.isPending && 'Comparing…'}>
          {button}
        </Button>
      </div>
    </form>
  );
}
