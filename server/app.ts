import { randomUUID } from 'node:crypto';
import { existsSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import express, { type Express } from 'express';
import helmet from 'helmet';
import { AppError, notFound } from './errors.ts';
import type { Endpoint } from './http/endpoint.ts';
import { errorHandler } from './http/errorHandler.ts';
import { health } from './http/health.ts';
import { openApiDocument } from './http/openapi.ts';
import { endpoints } from './routes.ts';
import type { Services } from './services.ts';

const CLIENT = fileURLToPath(new URL('../dist/client', import.meta.url));

const CONTENT_POLICY = {
  useDefaults: false,
  directives: {
    'default-src': ["'none'"],
    'script-src': ["'self'"],
    'style-src': ["'self'"],
    'img-src': ["'self'", 'data:', 'blob:'],
    'font-src': ["'self'"],
    'connect-src': ["'self'"],
    'manifest-src': ["'self'"],
    'worker-src': ["'self'"],
    'frame-src': ["'self'", 'blob:'],
    'object-src': ["'none'"],
    'base-uri': ["'none'"],
    'form-action': ["'self'"],
    'frame-ancestors': ["'none'"],
    'require-trusted-types-for': ["'script'"],
  },
};

/** The whole server as Express knows it, not listening yet. */
export function createApp(services: Services, options: { clientDir?: string } = {}): Express {
  const app = express();
  app.disable('x-powered-by');
  app.disable('etag');
  app.set('query parser', 'simple');
  app.set('trust proxy', services.config.trustProxy ?? false);
  app.use(requestLog(services));
  app.use(
    helmet({
      contentSecurityPolicy: CONTENT_POLICY,
      crossOriginEmbedderPolicy: false,
      referrerPolicy: { policy: 'no-referrer' },
      strictTransportSecurity: { maxAge: 31_536_000, includeSubDomains: true },
      xFrameOptions: { action: 'deny' },
    }),
  );
  app.use((_request, response, next) => {
    response.setHeader('Permissions-Policy', 'camera=(), microphone=(), geolocation=(), payment=(), usb=()');
    next();
  });
  app.use('/api', api(services));
  client(app, options.clientDir ?? CLIENT);
  app.use(() => {
    throw notFound();
  });
  app.use(errorHandler(services));
  return app;
}

function api(services: Services): express.Router {
  const router = express.Router({ caseSensitive: true, strict: true });
  router.use((_request, response, next) => {
    response.setHeader('Cache-Control', 'no-store');
    response.setHeader('Vary', 'Origin, Cookie');
    next();
  });
  router.get('/health', health(services));
  const document = openApiDocument(endpoints);
  router.get('/openapi.json', (_request, response) => {
    response.json(document);
  });
  router.use(express.json({ limit: '3mb', strict: true, type: 'application/json' }));
  router.use((request, _response, next) => {
    const length = request.headers['content-length'];
    if (request.body === undefined && length !== undefined && length !== '0')
      throw new AppError('wrong_type', 'Send JSON.');
    next();
  });
  const methods = new Map<string, Set<string>>();
  for (const one of endpoints) {
    register(router, services, one);
    methods.set(one.contract.path, (methods.get(one.contract.path) ?? new Set()).add(one.contract.method));
  }
  for (const [path, allowed] of methods) {
    router.all(path, (request, response) => {
      if (request.method === 'OPTIONS') {
        response.setHeader('Allow', [...allowed].join(', '));
        response.status(204).end();
        return;
      }
      response.setHeader('Allow', [...allowed].join(', '));
      throw new AppError('method', 'That cannot be done to this address.');
    });
  }
  return router;
}

function register(router: express.Router, services: Services, { contract, serve }: Endpoint): void {
  const method = contract.method.toLowerCase() as 'get' | 'post' | 'put' | 'patch' | 'delete';
  router[method](contract.path, (request, response) => serve(services, request, response));
}

/** One line a request: who cares about what, never a query, a body or a token. */
function requestLog(services: Services): express.RequestHandler {
  return (request, response, next) => {
    const began = process.hrtime.bigint();
    const requestId = randomUUID();
    response.locals.requestId = requestId;
    response.setHeader('X-Request-Id', requestId);
    const path = request.path.slice(0, 300);
    response.on('finish', () => {
      const ms = Number((process.hrtime.bigint() - began) / 10_000n) / 100;
      services.log.info({ requestId, method: request.method, path, status: response.statusCode, ms });
    });
    next();
  };
}

/** The built client: hashed assets for a year, the page itself never kept. */
function client(app: Express, dir: string): void {
  if (!existsSync(dir)) return;
  app.use(
    '/assets',
    express.static(`${dir}/assets`, { immutable: true, maxAge: '365d', fallthrough: false, etag: false }),
  );
  app.use(express.static(dir, { index: false, etag: false, cacheControl: false, setHeaders: noStore }));
  app.get(/^\/(?!api\/|assets\/).*/, (request, response, next) => {
    if (/\.[a-z0-9]{1,8}$/i.test(request.path)) return next();
    noStore(response);
    response.sendFile(`${dir}/index.html`, { cacheControl: false, etag: false, lastModified: false });
  });
}

function noStore(response: { setHeader(name: string, value: string): unknown }): void {
  response.setHeader('Cache-Control', 'no-store');
}
