import { type ReactNode, type TdHTMLAttributes, type ThHTMLAttributes, useId } from 'react';
import { cx } from '../lib/cx.ts';

interface TableProps {
  /** Says what the table holds; read out, shown only when `captionShown`. */
  caption: ReactNode;
  captionShown?: boolean;
  /** The heading row's `Th` cells. */
  head: ReactNode;
  /** The rows: `<tr>` of `Td`. */
  children: ReactNode;
  className?: string;
}

/**
 * A table with hairlines that scrolls sideways in its own frame when it must, never the page: `relative`, so that
 * words for screen readers inside it are cut off with it.
 */
export function Table({ caption, captionShown, head, children, className }: TableProps) {
  const id = useId();
  return (
    // biome-ignore lint/a11y/noNoninteractiveTabindex: a frame that scrolls must be reachable by keyboard
    <section className={cx('relative overflow-x-auto', className)} tabIndex={0} aria-labelledby={id}>
      <table className="w-full border-collapse text-base">
        <caption id={id} className={captionShown ? 'pb-2 text-left text-sm text-soft' : 'sr-only'}>
          {caption}
        </caption>
        <thead>
          <tr className="border-b border-ink">{head}</tr>
        </thead>
        <tbody className="[&>tr]:border-b [&>tr]:border-rule">{children}</tbody>
      </table>
    </section>
  );
}

interface ThProps extends ThHTMLAttributes<HTMLTableCellElement> {
  numeric?: boolean;
  /** Makes the heading a button that sorts by this column. */
  onSort?: () => void;
  sorted?: 'ascending' | 'descending' | undefined;
}

/** A column's heading; with `onSort` it can be pressed, and says which way the column is sorted. */
export function Th({ numeric, onSort, sorted, className, children, ...rest }: ThProps) {
  const arrow = sorted === 'ascending' ? '↑' : sorted === 'descending' ? '↓' : '';
  return (
    <th
      scope="col"
      {...rest}
      aria-sort={sorted}
      className={cx(
        'py-2 pr-4 align-bottom text-sm font-normal text-soft last:pr-0',
        numeric ? 'text-right' : 'text-left',
        className,
      )}
    >
      {onSort ? (
        <button
          type="button"
          onClick={onSort}
          className="-mt-3 -mb-2 inline-flex min-h-11 items-end gap-1 pt-3 pb-2 text-inherit underline-offset-4 hover:underline"
        >
          {children}
          <span aria-hidden="true">{arrow}</span>
        </button>
      ) : (
        children
      )}
    </th>
  );
}

interface TdProps extends TdHTMLAttributes<HTMLTableCellElement> {
  numeric?: boolean;
  /** Late or exposed: magenta and heavier. */
  attention?: boolean;
}

/** A cell. */
export function Td({ numeric, attention, className, ...rest }: TdProps) {
  return (
    <td
      {...rest}
      className={cx(
        'py-2.5 pr-4 align-top last:pr-0',
        numeric && 'text-right',
        attention && 'font-semibold text-magenta',
        className,
      )}
    />
  );
}

/** The row's name: a heading cell for screen readers. */
export function RowName({ className, ...rest }: ThHTMLAttributes<HTMLTableCellElement>) {
  return (
    <th scope="row" {...rest} className={cx('py-2.5 pr-4 text-left align-top font-medium', className)} />
  );
}
