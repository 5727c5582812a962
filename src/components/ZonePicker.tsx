import { type KeyboardEvent, useDeferredValue, useId, useMemo, useRef, useState } from 'react';
import { useNow } from '../lib/clock.ts';
import { cx } from '../lib/cx.ts';
import { searchZones, zoneInWords } from '../lib/zones.ts';
import { BOX, Field, type FieldText } from './Field.tsx';

interface ZonePickerProps extends FieldText {
  /** IANA name, or empty while nothing is chosen. */
  value: string;
  onChange: (zone: string) => void;
  className?: string;
}

const SHOWN = 8;

/** Chooses a zone of the IANA list by city, country or offset, with the keyboard or by pressing. */
export function ZonePicker({ label, hint, error, value, onChange, className }: ZonePickerProps) {
  const list = useId();
  const box = useRef<HTMLInputElement>(null);
  const now = useNow(600_000);
  const [search, setSearch] = useState<string | null>(null);
  const [current, setCurrent] = useState(0);
  const asked = useDeferredValue(search);
  const { shown, matching } = useMemo(
    () => (asked === null ? { shown: [], matching: 0 } : searchZones(asked, now, SHOWN)),
    [asked, now],
  );
  const open = search !== null;
  const choose = (zone: string) => {
    onChange(zone);
    setSearch(null);
  };
  const onKeyDown = (event: KeyboardEvent) => {
    if (event.key === 'ArrowDown' || event.key === 'ArrowUp') {
      event.preventDefault();
      if (!open) return setSearch('');
      const step = event.key === 'ArrowDown' ? 1 : -1;
      setCurrent((before) => Math.max(0, Math.min(shown.length - 1, before + step)));
    } else if (event.key === 'Enter' && open) {
      event.preventDefault();
      const zone = shown[current];
      if (zone) choose(zone.name);
    } else if (event.key === 'Escape' && open) {
      event.preventDefault();
      event.stopPropagation();
      setSearch(null);
    }
  };
  return (
    <Field label={label} hint={hint} error={error} className={className}>
      {(wiring) => (
        <div className="relative">
          <input
            {...wiring}
            ref={box}
            type="text"
            role="combobox"
            autoComplete="off"
            spellCheck={false}
            aria-expanded={open}
            aria-controls={open ? list : undefined}
            aria-autocomplete="list"
            aria-activedescendant={open && shown[current] ? `${list}-${current}` : undefined}
            placeholder="City, country or UTC+2"
            value={search ?? value}
            onChange={(event) => {
              setSearch(event.target.value);
              setCurrent(0);
            }}
            onClick={() => {
              if (!open) setSearch('');
            }}
            onBlur={() => setSearch(null)}
            onKeyDown={onKeyDown}
            className={BOX}
          />
          {open ? (
            <div className="mt-1.5 rounded-md border border-ink bg-paper">
              <div id={list} role="listbox" aria-label="Zones">
                {shown.map((zone, index) => (
                  // biome-ignore lint/a11y/useKeyWithClickEvents: the box above handles the keyboard
                  // biome-ignore lint/a11y/useFocusableInteractive: focus stays in the box, which names the current option
                  <div
                    key={zone.name}
                    id={`${list}-${index}`}
                    role="option"
                    aria-selected={index === current}
                    // Focus must stay in the box, or leaving it would close the list before the press counts.
                    onPointerDown={(event) => event.preventDefault()}
                    onClick={() => choose(zone.name)}
                    className={cx(
                      'flex min-h-11 cursor-pointer flex-wrap items-baseline justify-between gap-x-4 px-3 py-2',
                      index === current ? 'bg-land' : 'hover:bg-shoal',
                    )}
                  >
                    <span>{zone.name}</span>
                    <span className="text-sm text-soft">{zoneInWords(zone.name, now)}</span>
                  </div>
                ))}
              </div>
              <p role="status" className="px-3 py-2 text-sm text-soft">
                {matching === 0
                  ? 'No zone matches. Try the nearest large city, the country, or an offset such as UTC+2.'
                  : matching > shown.length
                    ? `The first ${shown.length} of ${matching}. Type more to narrow them.`
                    : `${matching} ${matching === 1 ? 'zone' : 'zones'}`}
              </p>
            </div>
          ) : value ? (
            <p className="mt-1 text-sm text-soft">{zoneInWords(value, now)}</p>
          ) : null}
        </div>
      )}
    </Field>
  );
}
