import type { RequestHandler } from 'express';
import { AppError } from '../errors.ts';
import type { Services } from '../services.ts';
import type { Endpoint } from './endpoint.ts';
import { jsonBody } from './jsonBody.ts';

interface Route {
  readonly serve: Endpoint['serve'];
  /** Null where a safe method takes no body. */
  readonly body: RequestHandler | null;
  readonly names: readonly string[];
}

/** What may follow a part of an address: a word, or anything, which then is a parameter. */
interface Place {
  readonly words: Map<string, Place>;
  anything: Place | null;
  readonly routes: Map<string, Route>;
}

const place = (): Place => ({ words: new Map(), anything: null, routes: new Map() });

function plant(root: Place, { contract, serve }: Endpoint): void {
  const names: string[] = [];
  let at = root;
  for (const part of contract.path.split('/').slice(1)) {
    if (part.startsWith(':')) {
      names.push(part.slice(1));
      at.anything ??= place();
      at = at.anything;
    } else {
      const next = at.words.get(part) ?? place();
      at.words.set(part, next);
      at = next;
    }
  }
  const body = contract.method === 'GET' ? null : jsonBody(contract);
  at.routes.set(contract.method, { serve, body, names });
}

/** The place an address leads to, with what stood where its parameters are. Letters count as they are written. */
function find(root: Place, path: string): { at: Place; found: string[] } | null {
  const found: string[] = [];
  let at = root;
  for (const part of path.split('/').slice(1)) {
    const word = at.words.get(part);
    const next = word ?? at.anything;
    if (!next) return null;
    if (!word) {
      if (part === '') return null;
      found.push(decodeURIComponent(part));
    }
    at = next;
  }
  return { at, found };
}

/**
 * Leads a request to its route by walking the parts of its address, so that finding one of a hundred routes costs as
 * much as finding one of ten. A known address by another method is refused with those it takes (RFC 9110 section
 * 15.5.6); OPTIONS names them.
 */
export function dispatch(services: Services, endpoints: readonly Endpoint[]): RequestHandler {
  const root = place();
  for (const one of endpoints) plant(root, one);
  return (request, response, next) => {
    const way = find(root, request.path);
    if (!way || way.at.routes.size === 0) return next();
    const { method } = request;
    const route = way.at.routes.get(method === 'HEAD' ? 'GET' : method);
    if (!route) {
      response.setHeader('Allow', [...way.at.routes.keys()].join(', '));
      if (method !== 'OPTIONS') throw new AppError('method', 'That cannot be done to this address.');
      response.status(204).end();
      return;
    }
    request.params = Object.fromEntries(route.names.map((name, index) => [name, way.found[index] ?? '']));
    if (!route.body) return route.serve(services, request, response);
    route.body(request, response, (error?: unknown) => {
      if (error) next(error);
      else route.serve(services, request, response).catch(next);
    });
  };
}
