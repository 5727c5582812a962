import type { ReactNode } from 'react';

/** Read out by screen readers, not shown. */
export function VisuallyHidden({ children }: { children: ReactNode }) {
  return <span className="sr-only">{children}</span>;
}
