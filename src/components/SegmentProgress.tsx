import { cx } from '../lib/cx.ts';

interface SegmentProgressProps {
  done: number;
  total: number;
  /** Read out ("Guests with a card"). */
  label: string;
  className?: string;
}

/** One division for each person or thing, filled when done. Above 60 it becomes one bar. */
export function SegmentProgress({ done, total, label, className }: SegmentProgressProps) {
  const gap = total > 60 ? '' : total > 24 ? 'gap-px' : 'gap-1';
  return (
    <div
      role="progressbar"
      aria-label={label}
      aria-valuemin={0}
      aria-valuemax={total}
      aria-valuenow={done}
      aria-valuetext={`${done} of ${total}`}
      className={cx('flex h-2', gap, className)}
    >
      {total > 60 ? (
        <>
          <span style={{ flexGrow: done }} className="border border-ink bg-ink" />
          <span style={{ flexGrow: total - done }} className="border border-ink" />
        </>
      ) : (
        Array.from({ length: total }, (_, index) => (
          <span
            // biome-ignore lint/suspicious/noArrayIndexKey: divisions have no identity but their place
            key={index}
            className={cx('grow border border-ink', index < done && 'bg-ink')}
          />
        ))
      )}
    </div>
  );
}
