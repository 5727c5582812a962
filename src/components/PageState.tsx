import type { ReactNode } from 'react';
import { ApiError, sentenceFor } from '../lib/errors.ts';
import { Button } from './Button.tsx';

/** While something is fetched: a plain sentence, shown only when it takes long enough to wonder. */
export function Loading({ children = 'Fetching…' }: { children?: ReactNode }) {
  return (
    <p role="status" className="animate-[arrive_150ms_400ms_backwards] py-6 text-soft">
      {children}
    </p>
  );
}

interface EmptyProps {
  /** What is so ("No party is on the list yet."). */
  title: ReactNode;
  /** What to do first. */
  children?: ReactNode;
  action?: ReactNode;
}

/** An empty list: what is so, and what to do first. */
export function Empty({ title, children, action }: EmptyProps) {
  return (
    <div className="flex max-w-xl flex-col items-start gap-3 py-8">
      <p className="text-lg font-medium">{title}</p>
      {children ? <div className="text-soft">{children}</div> : null}
      {action}
    </div>
  );
}

interface FailedProps {
  error: unknown;
  onRetry?: () => void;
  /** The server's sentence is shown after this ("The cards could not be fetched."). */
  title?: ReactNode;
}

/** Something could not be fetched: why, and the way to try again. */
export function Failed({ error, onRetry, title }: FailedProps) {
  const requestId = error instanceof ApiError ? error.requestId : undefined;
  return (
    <div role="alert" className="flex max-w-xl flex-col items-start gap-3 py-8">
      {title ? <p className="text-lg font-medium">{title}</p> : null}
      <p className="border-l-4 border-magenta bg-wash px-4 py-3">{sentenceFor(error)}</p>
      {requestId ? (
        <p className="text-sm text-soft">Number to quote when asking for help: {requestId}</p>
      ) : null}
      {onRetry ? <Button onClick={onRetry}>Try again</Button> : null}
    </div>
  );
}

interface TooManyProps {
  /** How many are shown. */
  shown: number;
  /** How to see fewer ("Search by name, or choose a month."). */
  children: ReactNode;
  onMore?: () => void;
  busy?: boolean;
}

/** The foot of a list that has more than fits: how to narrow it, and the way to the next ones. */
export function TooMany({ shown, children, onMore, busy }: TooManyProps) {
  return (
    <div className="flex flex-wrap items-center gap-4 py-4 text-sm text-soft">
      <p>
        The first {shown} are shown. {children}
      </p>
      {onMore ? (
        <Button onClick={onMore} busy={busy && 'Fetching…'}>
          Show more
        </Button>
      ) : null}
    </div>
  );
}

interface QueryLike<T> {
  data: T | undefined;
  error: unknown;
  refetch: () => unknown;
}

interface PageStateProps<T> {
  query: QueryLike<T>;
  loading?: ReactNode;
  failed?: ReactNode;
  /** Shown in place of the children when `isEmpty` says so. */
  empty?: ReactNode;
  isEmpty?: (data: T) => boolean;
  children: (data: T) => ReactNode;
}

/**
 * The four states of what is fetched. Data already here stays on the page when a later fetch fails; the banner says
 * that the server is away.
 */
export function PageState<T>({ query, loading, failed, empty, isEmpty, children }: PageStateProps<T>) {
  if (query.data !== undefined) {
    return empty && isEmpty?.(query.data) ? empty : children(query.data);
  }
  if (query.error) return <Failed error={query.error} title={failed} onRetry={() => void query.refetch()} />;
  return <Loading>{loading}</Loading>;
}
