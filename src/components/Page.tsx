import type { ReactNode } from 'react';
import { cx } from '../lib/cx.ts';

interface PageProps {
  children: ReactNode;
  className?: string;
}

/** A page's frame below the header: the margins of the shell, blocks one below the other. */
export function Page({ children, className }: PageProps) {
  return <div className={cx('flex flex-col gap-6 px-4 py-6 sm:px-8', className)}>{children}</div>;
}

interface SectionProps extends PageProps {
  title: ReactNode;
  action?: ReactNode;
}

/** A block of a page under its own heading. */
export function Section({ title, action, children, className }: SectionProps) {
  return (
    <section className={cx('flex flex-col gap-3', className)}>
      <div className="flex flex-wrap items-baseline justify-between gap-3">
        <h2 className="text-lg">{title}</h2>
        {action}
      </div>
      {children}
    </section>
  );
}
