import type { RequestHandler } from 'express';
import { AppError } from '../errors.ts';
import type { Services } from '../services.ts';

/** 200 when the database answers, 503 otherwise. */
export function health(services: Services): RequestHandler {
  return async (_request, response) => {
    try {
      await services.db.ping();
    } catch (cause) {
      throw new AppError('unavailable', 'The database does not answer.', { retryAfter: 3, cause });
    }
    response.json({ status: 'ok' });
  };
}
