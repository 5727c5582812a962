import type { ErrorRequestHandler } from 'express';
import { BaseError, ConnectionError, DatabaseError, UniqueConstraintError } from 'sequelize';
import type { Problem } from '../../shared/api/common.ts';
import { AppError } from '../errors.ts';
import type { Services } from '../services.ts';

const AWAY = 'Quayword cannot reach its database just now. Nothing was lost; it tries again by itself.';

/** Errors of the parts we build on, in our own words. Anything unknown stays unknown outside. */
function known(error: unknown): AppError {
  if (error instanceof AppError) return error;
  if (error instanceof ConnectionError)
    return new AppError('unavailable', AWAY, { retryAfter: 3, cause: error });
  if (error instanceof UniqueConstraintError)
    return new AppError('conflict', 'Somebody did this a moment ago. Look again before you repeat it.', {
      cause: error,
    });
  const code = sqlState(error);
  if (error instanceof DatabaseError && (code === null || /^(08|57P|57014|53|25P03)/.test(code)))
    return new AppError('unavailable', AWAY, { retryAfter: 3, cause: error });
  if (code === '40001' || code === '40P01' || code === '55P03')
    return new AppError('conflict', 'Two changes met. Look again, then repeat yours.', { cause: error });
  if (error instanceof Error && 'type' in error && 'status' in error) {
    if (error.type === 'entity.too.large')
      return new AppError('too_large', 'That is more than is taken here.');
    if (error.status === 415) return new AppError('wrong_type', 'That kind of content is not taken here.');
    if (typeof error.status === 'number' && error.status < 500)
      return new AppError('malformed', 'That request could not be read.');
  }
  if (error instanceof URIError) return new AppError('malformed', 'That address could not be read.');
  return new AppError(
    'internal',
    'Something went wrong on our side. Nothing was changed; please try again.',
    { cause: error },
  );
}

/** The database's own five-letter code (PostgreSQL manual, appendix A); null where the connection broke instead. */
function sqlState(error: unknown): string | null {
  if (!(error instanceof BaseError)) return null;
  const original: unknown =
    error instanceof DatabaseError ? error.original : 'original' in error ? error.original : null;
  const code = original instanceof Error && 'code' in original ? original.code : null;
  return typeof code === 'string' && /^(?=.*\d)[0-9A-Z]{5}$/.test(code) ? code : null;
}

/** What may be written down about an error: never its values, parameters or SQL. */
function describe(error: unknown): { name: string; code?: string; stack?: string } {
  if (!(error instanceof Error)) return { name: typeof error };
  const code = sqlState(error) ?? undefined;
  // A database error's message can quote the row; the stack's first line repeats the message.
  const frames = (error.stack ?? '')
    .split('\n')
    .filter((line) => line.trimStart().startsWith('at '))
    .slice(0, 8);
  return { name: error.name, ...(code ? { code } : {}), stack: frames.join('\n') };
}

export function errorHandler(services: Services): ErrorRequestHandler {
  return (error, request, response, _next) => {
    const problem = known(error);
    const requestId = String(response.locals.requestId ?? '');
    if (problem.status >= 500) {
      services.log.error(
        { requestId, code: problem.code, error: describe(problem.cause ?? error) },
        'request failed',
      );
    }
    if (response.headersSent) {
      response.destroy();
      return;
    }
    const body: Problem = {
      type: `about:blank#${problem.code}`,
      title: problem.title,
      status: problem.status,
      code: problem.code,
      detail: problem.sentence,
      requestId,
      ...(problem.errors ? { errors: problem.errors } : {}),
    };
    response.removeHeader('Set-Cookie');
    if (problem.retryAfter !== undefined) response.setHeader('Retry-After', String(problem.retryAfter));
    response.status(problem.status).type('application/problem+json').send(JSON.stringify(body));
    request.resume();
  };
}
