import { useState } from 'react';
import { PASSWORD_MAX, PASSWORD_MIN } from '../../../shared/rules/limits.ts';
import { TextInput } from '../../components/inputs.tsx';

interface NewPasswordFieldProps {
  value: string;
  onChange: (value: string) => void;
  error?: string | undefined;
  label?: string;
}

/** A new password, typed once and shown on request, which is kinder than typing it twice. */
export function NewPasswordField({ value, onChange, error, label = 'New password' }: NewPasswordFieldProps) {
  const [shown, setShown] = useState(false);
  return (
    <div className="w-full">
      <TextInput
        label={label}
        hint={`${PASSWORD_MIN} to ${PASSWORD_MAX} characters. A few words you do not use elsewhere are better than one clever word.`}
        error={error}
        type={shown ? 'text' : 'password'}
        autoComplete="new-password"
        maxLength={PASSWORD_MAX}
        required
        spellCheck={false}
        value={value}
        onChange={(event) => onChange(event.target.value)}
      />
      <label className="flex min-h-11 items-center gap-3 text-sm">
        <input
          type="checkbox"
          className="size-5 accent-ink"
          checked={shown}
          onChange={(event) => setShown(event.target.checked)}
        />
        Show what I type
      </label>
    </div>
  );
}
