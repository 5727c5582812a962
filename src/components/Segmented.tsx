import { useId } from 'react';
import { cx } from '../lib/cx.ts';

export interface Segment<V extends string> {
  value: V;
  /** What is written on it ("IT"). */
  label: string;
  /** What is read out when the writing is short ("Italian"). */
  name?: string;
}

interface SegmentedProps<V extends string> {
  /** Read out, not shown. */
  label: string;
  value: V;
  options: readonly Segment<V>[];
  onChange: (value: V) => void;
  className?: string;
}

/** One of a few short choices side by side: languages, themes, views. Arrow keys move between them. */
export function Segmented<V extends string>({
  label,
  value,
  options,
  onChange,
  className,
}: SegmentedProps<V>) {
  const group = useId();
  return (
    <fieldset className={cx('flex flex-wrap gap-1.5', className)}>
      <legend className="sr-only">{label}</legend>
      {options.map((option) => (
        <label
          key={option.value}
          className={cx(
            'relative flex min-h-12 min-w-11 grow items-center justify-center rounded-md border px-2 text-sm font-medium',
            'has-focus-visible:outline-2 has-focus-visible:outline-offset-2 has-focus-visible:outline-ink',
            option.value === value
              ? 'border-ink bg-paper text-ink'
              : 'border-shallow bg-transparent text-soft hover:bg-land hover:text-ink',
          )}
        >
          <input
            type="radio"
            name={group}
            className="absolute inset-0 size-full cursor-pointer opacity-0"
            checked={option.value === value}
            aria-label={option.name}
            onChange={() => onChange(option.value)}
          />
          <span aria-hidden={option.name ? true : undefined}>{option.label}</span>
        </label>
      ))}
    </fieldset>
  );
}
