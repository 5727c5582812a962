import { type ReactNode, useEffect, useId, useRef } from 'react';
import { cx } from '../lib/cx.ts';

interface DialogProps {
  open: boolean;
  /** Called on Esc, the close button or a press beside the dialog. */
  onClose: () => void;
  title: ReactNode;
  children: ReactNode;
  /** Buttons, at the foot. */
  actions?: ReactNode;
  size?: 'normal' | 'wide' | 'full';
  /** A press beside it does nothing, for forms that would lose what was typed. */
  keepOpen?: boolean;
}

const SIZES = { normal: 'max-w-lg', wide: 'max-w-3xl', full: 'h-full max-w-none' };

/**
 * A dialog above the page, on the browser's own element: focus stays inside, Esc closes, focus goes back to where
 * it was. Its content is only in the page while it is open.
 */
export function Dialog(props: DialogProps) {
  return props.open ? <OpenDialog {...props} /> : null;
}

function OpenDialog({ onClose, title, children, actions, size = 'normal', keepOpen }: DialogProps) {
  const ref = useRef<HTMLDialogElement>(null);
  const heading = useId();

  useEffect(() => {
    const before = document.activeElement;
    const dialog = ref.current;
    dialog?.showModal();
    return () => {
      dialog?.close();
      if (before instanceof HTMLElement && before.isConnected) before.focus();
    };
  }, []);

  return (
    // biome-ignore lint/a11y/useKeyWithClickEvents: Esc is the keyboard's way, handled by the element itself
    <dialog
      ref={ref}
      aria-labelledby={heading}
      onCancel={(event) => {
        event.preventDefault();
        onClose();
      }}
      onClick={(event) => {
        if (event.target === ref.current && !keepOpen) onClose();
      }}
      className={cx(
        'max-h-[calc(100dvh-1.5rem)] w-[calc(100%-1.5rem)] overflow-auto rounded-lg border border-ink bg-paper p-0',
        'motion-safe:animate-arrive',
        SIZES[size],
      )}
    >
      <div className="flex min-h-full flex-col gap-4 p-5 sm:p-6">
        <div className="flex items-start justify-between gap-4">
          <h2 id={heading} className="text-xl">
            {title}
          </h2>
          <button
            type="button"
            onClick={onClose}
            className="-mt-2 -mr-2 min-h-11 shrink-0 px-2 text-sm text-deep underline underline-offset-4"
          >
            Close
          </button>
        </div>
        <div className="flex grow flex-col gap-4">{children}</div>
        {actions ? <div className="flex flex-wrap justify-end gap-3">{actions}</div> : null}
      </div>
    </dialog>
  );
}
