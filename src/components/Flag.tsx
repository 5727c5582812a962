import type { ReactNode } from 'react';
import { AUDIENCE_NAMES, type Audience } from '../../shared/rules/permissions.ts';
import { cx } from '../lib/cx.ts';

const SHAPES: Record<Audience, ReactNode> = {
  owner: <path d="M4 3h36v22H4z" className="fill-flag-blue" />,
  guest: (
    <>
      <path d="M4 3h36v22H4z" className="fill-flag-blue" />
      <path d="M4 3h9.5L40 19.6V25h-9.5L4 8.4z" className="fill-flag-white" />
    </>
  ),
  crew: <path d="M4 4l36 10L4 24z" className="fill-flag-red" />,
};

interface FlagProps {
  audience: Audience;
  size?: 'small' | 'large';
  /** Leave the word out only where the audience already stands beside the flag in words. */
  word?: boolean;
}

/** The etiquette flag of an audience on its staff, with the word beside it. Shapes differ, not only colours. */
export function Flag({ audience, size = 'small', word = true }: FlagProps) {
  return (
    <span className="inline-flex items-center gap-2.5 whitespace-nowrap">
      <svg
        viewBox="0 0 41 28"
        aria-hidden="true"
        className={cx('shrink-0', size === 'large' ? 'h-7 w-10' : 'h-5 w-7.5')}
      >
        <path d="M0 0h2.6v28H0z" className="fill-ink" />
        {SHAPES[audience]}
      </svg>
      {word ? <span className="text-soft">{AUDIENCE_NAMES[audience]}</span> : null}
    </span>
  );
}
