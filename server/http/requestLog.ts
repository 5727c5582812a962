import { randomUUID } from 'node:crypto';
import type { RequestHandler, Response } from 'express';
import type { Services } from '../services.ts';

/** What the log tells about an answer besides its status; set where it becomes known. */
interface Told {
  requestId?: string;
  /** The route's name. */
  route?: string;
  vesselId?: string | null;
  personId?: string;
}

export const told = (response: Response): Told => response.locals;

/**
 * One line a request: who did what, where, how it ended and how many milliseconds it took. Of the address only the
 * route's name and the vessel are kept, never what somebody typed there; no query, body or token (R26).
 */
export function requestLog(services: Services): RequestHandler {
  return (request, response, next) => {
    const began = performance.now();
    const requestId = randomUUID();
    const known = told(response);
    known.requestId = requestId;
    response.setHeader('X-Request-Id', requestId);
    response.on('finish', () => {
      services.log.info({
        requestId,
        method: request.method,
        route: known.route,
        vessel: known.vesselId ?? undefined,
        person: known.personId,
        status: response.statusCode,
        ms: Math.round((performance.now() - began) * 100) / 100,
      });
    });
    next();
  };
}
