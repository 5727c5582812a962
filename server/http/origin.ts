import type { Request } from 'express';
import type { Config } from '../config.ts';
import { AppError } from '../errors.ts';
import { csrfToken, sameText } from './session.ts';

const SAFE = new Set(['GET', 'HEAD', 'OPTIONS']);

/**
 * A change must come from our own pages: the Origin (or Fetch-Metadata) header says so, the body is JSON or
 * an upload by our client, and a signed-in request carries its session's token.
 */
export function requireSameOrigin(config: Config, request: Request, sessionId: string | null): void {
  if (SAFE.has(request.method)) return;
  const refuse = () =>
    new AppError('bad_origin', 'That request did not come from this page. Reload the page and try again.');
  const origin = request.headers.origin;
  if (!origin || origin !== config.publicUrl) throw refuse();
  const site = request.headers['sec-fetch-site'];
  if (site !== undefined && site !== 'same-origin') throw refuse();
  if (sessionId !== null) {
    const token = request.headers['x-quayword-csrf'];
    if (typeof token !== 'string' || !sameText(token, csrfToken(config, sessionId))) throw refuse();
  }
}
