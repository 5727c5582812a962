import type { z } from 'zod';
import { ApiError } from './errors.ts';

type Result<T> = { ok: true; value: T } | { ok: false; error: ApiError };

/**
 * Checks a form by the schema the server uses, and answers every invalid field keyed by path, in the shape the
 * server would. The server checks again.
 */
export function checkForm<S extends z.ZodType>(schema: S, values: unknown): Result<z.output<S>> {
  const parsed = schema.safeParse(values);
  if (parsed.success) return { ok: true, value: parsed.data };
  const errors: Record<string, string[]> = {};
  for (const issue of parsed.error.issues) {
    const path = issue.path.join('.');
    const sentences = errors[path] ?? [];
    sentences.push(issue.message);
    errors[path] = sentences;
  }
  return { ok: false, error: refusedForm(errors) };
}

/** What is wrong with a form, by field path, in the shape the server would answer. */
export function refusedForm(errors: Record<string, string[]>): ApiError {
  const detail = 'Some fields need another look. Nothing was changed.';
  return new ApiError({ code: 'invalid', detail, errors }, 422);
}
