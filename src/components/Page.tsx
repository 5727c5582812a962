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
  /** On wide screens the heading stands at the left of its block, as in a form's margin. */
  aside?: boolean;
}

/** A block of a page under its own heading. */
export function Section({ title, action, children, className, aside }: SectionProps) {
  return (
    <section
      className={cx(
        'flex flex-col gap-3',
        aside && 'border-t border-rule pt-6 lg:grid lg:grid-cols-[16rem_1fr] lg:gap-x-8',
        className,
      )}
    >
      <div className="flex flex-wrap content-start items-baseline justify-between gap-3">
        <h2 className="text-lg">{title}</h2>
        {action}
      </div>
      {aside ? <div className="flex min-w-0 flex-col gap-4">{children}</div> : children}
    </section>
  );
}
