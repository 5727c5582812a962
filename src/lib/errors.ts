import type { Problem } from '../../shared/api/common.ts';

/** The server answered and refused. `message` is a sentence for the person; `code` is stable for the program. */
export class ApiError extends Error {
  readonly status: number;
  readonly code: string;
  readonly requestId: string | undefined;
  /** Sentences that say what would be right, keyed by the field's path ("cabins.0.name"). */
  readonly fields: Readonly<Record<string, readonly string[]>>;
  /** Seconds the server asks to wait, on 429. */
  readonly retryAfter: number | undefined;

  constructor(problem: Partial<Problem>, status: number, retryAfter?: number) {
    super(problem.detail ?? problem.title ?? 'Something went wrong, and nothing was changed. Try again.');
    this.name = 'ApiError';
    this.status = status;
    this.code = problem.code ?? 'unknown';
    this.requestId = problem.requestId;
    this.fields = problem.errors ?? {};
    this.retryAfter = retryAfter;
  }
}

/** The server, or the database behind it, cannot be reached just now. A change that was under way may have happened. */
export class AwayError extends Error {
  constructor(changing = false) {
    super(
      changing
        ? 'Quayword cannot reach its server just now. Keep this page open and press again once it is back; it will not happen twice.'
        : 'Quayword cannot reach its server just now. This page carries on by itself as soon as it can.',
    );
    this.name = 'AwayError';
  }
}

/** The sentence to show for any error. */
export function sentenceFor(error: unknown): string {
  if (error instanceof ApiError || error instanceof AwayError) return error.message;
  return 'Something went wrong in this page. Load it again; if it stays, tell whoever looks after Quayword.';
}

/** The server's sentences for one field, or undefined when the field is fine. */
export function fieldError(error: unknown, path: string): string | undefined {
  if (!(error instanceof ApiError)) return undefined;
  const sentences = error.fields[path];
  return sentences && sentences.length > 0 ? sentences.join(' ') : undefined;
}

/** Whether the error names at least one field: the form then shows it there and not at its foot. */
export function namesFields(error: unknown): boolean {
  return error instanceof ApiError && Object.keys(error.fields).length > 0;
}
