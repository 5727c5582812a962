import type { ReactNode } from 'react';
import { cx } from '../lib/cx.ts';

interface SentenceProps {
  children: ReactNode;
  /** What can be done about it, at the right. */
  action?: ReactNode;
  className?: string;
}

/** A page's first line: what is so and what to do, as its main heading. */
export function Sentence({ children, action, className }: SentenceProps) {
  return (
    <div className={cx('flex flex-wrap items-start justify-between gap-x-8 gap-y-3', className)}>
      <h1 className="max-w-[46rem] text-xl leading-snug">{children}</h1>
      {action}
    </div>
  );
}

/** The figure or clause of a sentence that needs attention. */
export function Attention({ children }: { children: ReactNode }) {
  return <strong className="font-semibold text-magenta">{children}</strong>;
}
