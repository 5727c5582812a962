import type { InputHTMLAttributes, ReactNode, SelectHTMLAttributes, TextareaHTMLAttributes } from 'react';
import { useId } from 'react';
import { cx } from '../lib/cx.ts';
import { BOX, Field, FieldError, type FieldText } from './Field.tsx';

type Without<T> = Omit<T, 'id' | 'aria-describedby' | 'aria-invalid'>;

interface TextInputProps extends Without<InputHTMLAttributes<HTMLInputElement>>, FieldText {
  boxClassName?: string;
}

/** A line of text with its label, hint and error. `className` is the whole field's, `boxClassName` the box's. */
export function TextInput({ label, hint, error, className, boxClassName, ...input }: TextInputProps) {
  return (
    <Field label={label} hint={hint} error={error} className={className}>
      {(wiring) => <input type="text" {...input} {...wiring} className={cx(BOX, boxClassName)} />}
    </Field>
  );
}

interface TextAreaProps extends Without<TextareaHTMLAttributes<HTMLTextAreaElement>>, FieldText {}

/** Several lines of text with label, hint and error. */
export function TextArea({ label, hint, error, className, ...input }: TextAreaProps) {
  return (
    <Field label={label} hint={hint} error={error} className={className}>
      {(wiring) => <textarea rows={3} {...input} {...wiring} className={BOX} />}
    </Field>
  );
}

export interface Choice<V extends string = string> {
  value: V;
  label: string;
}

interface SelectProps extends Without<SelectHTMLAttributes<HTMLSelectElement>>, FieldText {
  options: readonly Choice[];
}

/** One of several, with label, hint and error. */
export function Select({ label, hint, error, className, options, ...select }: SelectProps) {
  return (
    <Field label={label} hint={hint} error={error} className={className}>
      {(wiring) => (
        <select {...select} {...wiring} className={BOX}>
          {options.map((option) => (
            <option key={option.value} value={option.value}>
              {option.label}
            </option>
          ))}
        </select>
      )}
    </Field>
  );
}

interface CheckboxProps extends Omit<InputHTMLAttributes<HTMLInputElement>, 'type'>, FieldText {}

const TICK = 'mt-0.5 size-5 shrink-0 accent-ink';

/** A yes-or-no with its sentence; the whole line can be pressed. */
export function Checkbox({ label, hint, error, className, ...input }: CheckboxProps) {
  const id = useId();
  const described = [hint ? `${id}-hint` : '', error ? `${id}-error` : ''].filter(Boolean).join(' ');
  return (
    <div className={className}>
      <label className="flex min-h-11 items-start gap-3 py-2">
        <input
          {...input}
          type="checkbox"
          aria-describedby={described || undefined}
          aria-invalid={error ? true : undefined}
          className={TICK}
        />
        <span className="min-w-0">{label}</span>
      </label>
      {hint ? (
        <p id={`${id}-hint`} className="pl-8 text-sm text-soft">
          {hint}
        </p>
      ) : null}
      {error ? <FieldError id={`${id}-error`}>{error}</FieldError> : null}
    </div>
  );
}

interface RadioRowProps<V extends string> {
  label: ReactNode;
  hint?: ReactNode;
  error?: string | undefined;
  /** Only shown to screen readers when true. */
  labelHidden?: boolean;
  name: string;
  value: V | null;
  options: readonly (Choice<V> & { hint?: ReactNode; disabled?: boolean })[];
  onChange: (value: V) => void;
  className?: string;
}

/** A few choices, each with an optional line that explains it, one below the other. */
export function RadioRow<V extends string>(props: RadioRowProps<V>) {
  const { label, hint, error, labelHidden, name, value, options, onChange, className } = props;
  const id = useId();
  return (
    <fieldset className={className} aria-describedby={error ? `${id}-error` : undefined}>
      <legend className={labelHidden ? 'sr-only' : 'text-sm font-medium'}>{label}</legend>
      {hint ? <p className="text-sm text-soft">{hint}</p> : null}
      {options.map((option) => (
        <label key={option.value} className="flex min-h-11 items-start gap-3 py-2">
          <input
            type="radio"
            name={name}
            className={TICK}
            value={option.value}
            checked={value === option.value}
            disabled={option.disabled}
            onChange={() => onChange(option.value)}
          />
          <span>
            {option.label}
            {option.hint ? <span className="block text-sm text-soft">{option.hint}</span> : null}
          </span>
        </label>
      ))}
      {error ? <FieldError id={`${id}-error`}>{error}</FieldError> : null}
    </fieldset>
  );
}
