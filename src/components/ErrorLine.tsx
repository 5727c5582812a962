import { cx } from '../lib/cx.ts';
import { namesFields, sentenceFor } from '../lib/errors.ts';

interface ErrorLineProps {
  error: unknown;
  /** The form shows errors of single fields at the fields; only what is about the form as a whole stands here. */
  fieldsShown?: boolean;
  className?: string;
}

/** Why something could not be done, as one line; nothing where nothing went wrong. */
export function ErrorLine({ error, fieldsShown, className }: ErrorLineProps) {
  if (!error || (fieldsShown && namesFields(error))) return null;
  return (
    <p role="alert" className={cx('text-sm font-medium text-magenta', className)}>
      {sentenceFor(error)}
    </p>
  );
}
