import type { Policy } from '../../../shared/api/networks.ts';
import { Button } from '../../components/Button.tsx';
import { FieldError } from '../../components/Field.tsx';
import { TextInput } from '../../components/inputs.tsx';
import { cx } from '../../lib/cx.ts';
import { fieldError } from '../../lib/errors.ts';
import { WEEKDAYS } from './policyWords.ts';

type Quiet = Policy['quietHours'][number];

const MOST = 14;
const NEW: Quiet = { days: [1, 2, 3, 4, 5, 6, 7], from: '02:00', to: '04:00' };

interface QuietHoursEditorProps {
  value: readonly Quiet[];
  onChange: (value: Quiet[]) => void;
  error: unknown;
}

/** Hours in which a change disturbs least: weekdays and a stretch of each, in ship's time; may pass midnight. */
export function QuietHoursEditor({ value, onChange, error }: QuietHoursEditorProps) {
  const set = (index: number, change: Partial<Quiet>) =>
    onChange(value.map((quiet, place) => (place === index ? { ...quiet, ...change } : quiet)));
  return (
    <fieldset className="flex flex-col gap-3">
      <legend className="text-sm font-medium">Quiet hours</legend>
      <p className="text-sm text-soft">
        When a change disturbs least, in ship's time. Without any, it may happen at any hour.
      </p>
      {value.map((quiet, index) => (
        <div
          // biome-ignore lint/suspicious/noArrayIndexKey: stretches have no identity but their place
          key={index}
          className="flex flex-col gap-3 border-t border-rule pt-3"
        >
          <Days
            label={`Days of stretch ${index + 1}`}
            days={quiet.days}
            onChange={(days) => set(index, { days })}
            error={fieldError(error, `quietHours.${index}.days`)}
          />
          <div className="flex flex-wrap items-end gap-3">
            <TextInput
              type="time"
              label="From"
              value={quiet.from}
              onChange={(event) => set(index, { from: event.target.value })}
              error={fieldError(error, `quietHours.${index}.from`)}
            />
            <TextInput
              type="time"
              label={quiet.to !== '' && quiet.to < quiet.from ? 'To, the next day' : 'To'}
              value={quiet.to}
              onChange={(event) => set(index, { to: event.target.value })}
              error={fieldError(error, `quietHours.${index}.to`)}
            />
            <Button
              kind="quiet"
              aria-label={`Remove stretch ${index + 1}`}
              onClick={() => onChange(value.filter((_, place) => place !== index))}
            >
              Remove
            </Button>
          </div>
        </div>
      ))}
      {value.length < MOST ? (
        <Button className="self-start" onClick={() => onChange([...value, NEW])}>
          Add quiet hours
        </Button>
      ) : null}
    </fieldset>
  );
}

interface DaysProps {
  label: string;
  days: readonly number[];
  onChange: (days: number[]) => void;
  error: string | undefined;
}

function Days({ label, days, onChange, error }: DaysProps) {
  return (
    <fieldset>
      <legend className="sr-only">{label}</legend>
      <div className="flex flex-wrap gap-1.5">
        {WEEKDAYS.map((name, index) => {
          const day = index + 1;
          const on = days.includes(day);
          return (
            <label
              key={name}
              className={cx(
                'relative flex min-h-11 min-w-12 items-center justify-center rounded-md border px-2 text-sm',
                'has-focus-visible:outline-2 has-focus-visible:outline-offset-2 has-focus-visible:outline-ink',
                on ? 'border-ink bg-land font-medium' : 'border-rule text-soft',
              )}
            >
              <input
                type="checkbox"
                checked={on}
                className="absolute inset-0 size-full cursor-pointer opacity-0"
                onChange={() =>
                  onChange(
                    on ? days.filter((one) => one !== day) : [...days, day].sort((one, other) => one - other),
                  )
                }
              />
              <span>{name}</span>
            </label>
          );
        })}
      </div>
      {error ? <FieldError>{error}</FieldError> : null}
    </fieldset>
  );
}
