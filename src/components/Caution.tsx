import type { ReactNode } from 'react';
import { cx } from '../lib/cx.ts';

interface CautionProps {
  children: ReactNode;
  action?: ReactNode;
  className?: string;
  /** Announced at once when it appears after something the person did. */
  announce?: boolean;
}

/** Something to mind before going on. The only block with a coloured edge. */
export function Caution({ children, action, className, announce }: CautionProps) {
  return (
    <div
      role={announce ? 'alert' : undefined}
      className={cx('border-l-4 border-magenta bg-wash px-4 py-3 text-sm text-ink', className)}
    >
      {children}
      {action ? <div className="mt-2">{action}</div> : null}
    </div>
  );
}
