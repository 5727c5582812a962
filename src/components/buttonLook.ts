import { cx } from '../lib/cx.ts';

/**
 * `primary` is the one thing to do on a page; `secondary` stands beside it; `quiet` is a word that can be pressed;
 * `attention` is for what cannot be put back or must happen now.
 */
export type ButtonKind = 'primary' | 'secondary' | 'quiet' | 'attention';
/** `normal` is 44 px high, `large` 56 px for thumbs at the gangway. */
export type ButtonSize = 'normal' | 'large';

const KINDS: Record<ButtonKind, string> = {
  primary: 'border-fill bg-fill text-on-fill hover:brightness-125',
  secondary: 'border-ink bg-paper text-ink hover:bg-land',
  quiet: 'border-transparent bg-transparent text-deep underline underline-offset-4 hover:text-ink',
  attention: 'border-magenta-fill bg-magenta-fill text-on-magenta hover:brightness-110',
};

const SIZES: Record<ButtonSize, string> = {
  normal: 'min-h-11 px-4 py-2 text-base',
  large: 'min-h-14 px-5 py-3 text-lg',
};

/** The classes of a button, for links that must look like one. */
export function buttonLook(
  kind: ButtonKind = 'secondary',
  size: ButtonSize = 'normal',
  wide = false,
): string {
  return cx(
    'inline-flex items-center justify-center gap-2 rounded-md border text-center font-medium leading-tight',
    'transition-[background-color,filter] duration-150 disabled:cursor-not-allowed disabled:border-rule',
    'disabled:bg-transparent disabled:text-soft disabled:no-underline disabled:hover:brightness-100',
    'aria-disabled:cursor-progress',
    KINDS[kind],
    SIZES[size],
    wide && 'w-full',
  );
}
