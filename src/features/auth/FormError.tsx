import { Caution } from '../../components/Caution.tsx';
import { ApiError, namesFields, sentenceFor } from '../../lib/errors.ts';

/** What went wrong with a form as a whole; errors of single fields stand at the fields. */
export function FormError({ error }: { error: unknown }) {
  if (!error || namesFields(error)) return null;
  const wait = error instanceof ApiError ? error.retryAfter : undefined;
  return (
    <Caution announce>
      {sentenceFor(error)}
      {wait === undefined
        ? null
        : ` Wait ${wait < 90 ? `${wait} seconds` : `${Math.ceil(wait / 60)} minutes`} first.`}
    </Caution>
  );
}
