import express, { type RequestHandler } from 'express';
import { JSON_MAX_BYTES } from '../../shared/rules/limits.ts';
import { AppError } from '../errors.ts';
import type { AnyContract } from './reply.ts';

const parsers = new Map<number, RequestHandler>();

/** One parser for each size that is asked for. */
function parserFor(limit: number): RequestHandler {
  const known = parsers.get(limit);
  if (known) return known;
  const made = express.json({ limit, strict: true, type: 'application/json' });
  parsers.set(limit, made);
  return made;
}

/**
 * Reads a route's JSON body up to the route's own size, counted after inflating. A body of any other type is refused,
 * so that a form on somebody else's page cannot write one (OWASP, CSRF: custom content types).
 */
export function jsonBody({ bodyMax = JSON_MAX_BYTES }: AnyContract): RequestHandler {
  const parse = parserFor(bodyMax);
  return (request, response, next) => {
    parse(request, response, (error?: unknown) => {
      if (error) return next(error);
      const { 'content-length': length, 'transfer-encoding': chunked } = request.headers;
      const sent = chunked !== undefined || (length !== undefined && length !== '0');
      if (sent && request.body === undefined) return next(new AppError('wrong_type', 'Send JSON.'));
      next();
    });
  };
}
