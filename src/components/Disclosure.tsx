import { type ReactNode, useEffect, useId, useRef, useState } from 'react';
import { cx } from '../lib/cx.ts';

interface DisclosureProps {
  /** What the button shows. */
  button: ReactNode;
  /** Read out for the button when what it shows is not enough. */
  label?: string;
  children: (close: () => void) => ReactNode;
  align?: 'left' | 'right';
  className?: string;
}

/** A button that opens a small panel below itself; Esc, a press elsewhere or leaving it by keyboard closes it. */
export function Disclosure({ button, label, children, align = 'right', className }: DisclosureProps) {
  const [open, setOpen] = useState(false);
  const frame = useRef<HTMLDivElement>(null);
  const opener = useRef<HTMLButtonElement>(null);
  const id = useId();
  useEffect(() => {
    if (!open) return;
    const away = (event: Event) => {
      if (!frame.current?.contains(event.target as Node)) setOpen(false);
    };
    const onEscape = (event: KeyboardEvent) => {
      if (event.key !== 'Escape') return;
      setOpen(false);
      opener.current?.focus();
    };
    document.addEventListener('pointerdown', away);
    document.addEventListener('focusin', away);
    document.addEventListener('keydown', onEscape);
    return () => {
      document.removeEventListener('pointerdown', away);
      document.removeEventListener('focusin', away);
      document.removeEventListener('keydown', onEscape);
    };
  }, [open]);
  return (
    <div ref={frame} className={cx('relative', className)}>
      <button
        ref={opener}
        type="button"
        aria-expanded={open}
        aria-controls={open ? id : undefined}
        aria-label={label}
        onClick={() => setOpen((before) => !before)}
        className="min-h-11 rounded-md px-2 py-1 hover:bg-land"
      >
        {button}
      </button>
      {open ? (
        <div
          id={id}
          className={cx(
            'absolute top-full z-10 mt-1 w-72 max-w-[calc(100vw-2rem)] rounded-lg border border-ink bg-paper p-4',
            'motion-safe:animate-arrive',
            align === 'right' ? 'right-0' : 'left-0',
          )}
        >
          {children(() => setOpen(false))}
        </div>
      ) : null}
    </div>
  );
}
