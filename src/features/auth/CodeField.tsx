import { useEffect, useRef } from 'react';
import { TextInput } from '../../components/inputs.tsx';

interface CodeFieldProps {
  value: string;
  onChange: (value: string) => void;
  error?: string | undefined;
  /** Takes the focus when it appears. */
  focused?: boolean;
  /** Recovery codes are taken too. */
  recovery?: boolean;
}

/** The six figures of the authenticator app, or one of the recovery codes. */
export function CodeField({ value, onChange, error, focused, recovery = true }: CodeFieldProps) {
  const frame = useRef<HTMLDivElement>(null);
  useEffect(() => {
    if (focused) frame.current?.querySelector('input')?.focus();
  }, [focused]);
  return (
    <div ref={frame}>
      <TextInput
        label="Code"
        hint={
          recovery
            ? 'The six figures your authenticator app shows now, or one of your recovery codes.'
            : 'The six figures your authenticator app shows now.'
        }
        autoComplete="one-time-code"
        inputMode={recovery ? 'text' : 'numeric'}
        autoCapitalize="off"
        spellCheck={false}
        maxLength={64}
        required
        value={value}
        onChange={(event) => onChange(event.target.value)}
        error={error}
        boxClassName="text-xl tracking-wider"
      />
    </div>
  );
}
