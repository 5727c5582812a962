import { cx } from '../lib/cx.ts';

interface ScaleProps {
  /** How many black-and-white divisions. */
  segments: number;
  className?: string;
  /** Boxed all round, as a ruler; otherwise only a line below, as a page's edge. */
  boxed?: boolean;
}

/** A chart's graduated border: the axis of every time and age scale. Decoration; say its figures beside it. */
export function Scale({ segments, className, boxed }: ScaleProps) {
  const blocks = Array.from({ length: Math.ceil(segments / 2) }, (_, index) => `M${index * 2} 0h1v1h-1z`);
  return (
    <svg
      viewBox={`0 0 ${segments} 1`}
      preserveAspectRatio="none"
      aria-hidden="true"
      className={cx('block w-full border-scale bg-paper', boxed ? 'border' : 'border-b', className)}
    >
      <path d={blocks.join('')} className="fill-scale" />
    </svg>
  );
}
