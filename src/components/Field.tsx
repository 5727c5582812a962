import { type ReactNode, useId } from 'react';
import { cx } from '../lib/cx.ts';

export interface FieldText {
  label: ReactNode;
  /** What is expected, said before anything goes wrong. */
  hint?: ReactNode;
  /** What would be right, when what was given is not. */
  error?: string | undefined;
}

export interface Wiring {
  id: string;
  'aria-describedby': string | undefined;
  'aria-invalid': true | undefined;
}

interface FieldProps extends FieldText {
  className?: string | undefined;
  children: (wiring: Wiring) => ReactNode;
}

/** A label with its control, hint and error, wired together for screen readers. */
export function Field({ label, hint, error, className, children }: FieldProps) {
  const id = useId();
  const described = [hint ? `${id}-hint` : '', error ? `${id}-error` : ''].filter(Boolean).join(' ');
  return (
    <div className={cx('flex flex-col gap-1', className)}>
      <label htmlFor={id} className="text-sm font-medium">
        {label}
      </label>
      {hint ? (
        <p id={`${id}-hint`} className="text-sm text-soft">
          {hint}
        </p>
      ) : null}
      {children({
        id,
        'aria-describedby': described || undefined,
        'aria-invalid': error ? true : undefined,
      })}
      {error ? <FieldError id={`${id}-error`}>{error}</FieldError> : null}
    </div>
  );
}

/** The sentence under a field that says what would be right. */
export function FieldError({ id, children }: { id?: string; children: ReactNode }) {
  return (
    <p id={id} className="text-sm font-medium text-magenta">
      {children}
    </p>
  );
}

/** The look of every box that is typed or chosen in. */
export const BOX =
  'min-h-11 w-full rounded-md border border-soft bg-box px-3 py-2 text-base text-ink ' +
  'placeholder:text-soft disabled:opacity-60 aria-invalid:border-2 aria-invalid:border-magenta';
