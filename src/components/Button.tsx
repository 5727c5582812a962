import type { ButtonHTMLAttributes } from 'react';
import { Link, type LinkProps } from 'react-router-dom';
import { cx } from '../lib/cx.ts';
import { type ButtonKind, type ButtonSize, buttonLook } from './buttonLook.ts';

interface Look {
  kind?: ButtonKind;
  size?: ButtonSize;
  /** Takes the whole width of its place. */
  wide?: boolean;
}

interface ButtonProps extends ButtonHTMLAttributes<HTMLButtonElement>, Look {
  /** What it says while its work runs ("Signing in…"); presses are ignored meanwhile, focus stays. */
  busy?: string | false;
}

/** A button at least 44 px high. `type` is `button` unless said. */
export function Button({ kind, size, wide, busy, className, children, onClick, type, ...rest }: ButtonProps) {
  return (
    <button
      {...rest}
      type={type ?? 'button'}
      aria-disabled={busy ? true : undefined}
      className={cx(buttonLook(kind, size, wide), className)}
      onClick={(event) => {
        if (busy) event.preventDefault();
        else onClick?.(event);
      }}
    >
      {busy || children}
    </button>
  );
}

/** A link that looks like a button, for going somewhere. */
export function ButtonLink({ kind, size, wide, className, ...rest }: LinkProps & Look) {
  return <Link {...rest} className={cx(buttonLook(kind, size, wide), className)} />;
}
