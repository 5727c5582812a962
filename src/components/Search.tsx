import { useEffect, useId, useRef } from 'react';
import { SEARCH_MAX } from '../../shared/rules/limits.ts';
import { BOX } from './Field.tsx';

interface SearchProps {
  /** Shown in the empty box and read out ("Search vessels"). */
  label: string;
  value: string;
  onChange: (value: string) => void;
  className?: string;
}

function typing(target: EventTarget | null): boolean {
  return (
    target instanceof HTMLInputElement ||
    target instanceof HTMLTextAreaElement ||
    target instanceof HTMLSelectElement ||
    (target instanceof HTMLElement && target.isContentEditable)
  );
}

/** A search box; `/` anywhere on the page goes to it, Esc empties it. */
export function Search({ label, value, onChange, className }: SearchProps) {
  const id = useId();
  const box = useRef<HTMLInputElement>(null);
  useEffect(() => {
    const listen = (event: KeyboardEvent) => {
      if (event.key !== '/' || event.ctrlKey || event.metaKey || event.altKey || typing(event.target)) return;
      event.preventDefault();
      box.current?.focus();
      box.current?.select();
    };
    document.addEventListener('keydown', listen);
    return () => document.removeEventListener('keydown', listen);
  }, []);
  return (
    <div className={className}>
      <label htmlFor={id} className="sr-only">
        {label}
      </label>
      <input
        id={id}
        ref={box}
        type="search"
        maxLength={SEARCH_MAX}
        autoComplete="off"
        spellCheck={false}
        aria-keyshortcuts="/"
        placeholder={`${label}  /`}
        value={value}
        onChange={(event) => onChange(event.target.value)}
        onKeyDown={(event) => {
          if (event.key === 'Escape') onChange('');
        }}
        className={BOX}
      />
    </div>
  );
}
