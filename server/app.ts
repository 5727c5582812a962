import { existsSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import express, { type Express } from 'express';
import { notFound } from './errors.ts';
import { dispatch } from './http/dispatch.ts';
import { errorHandler } from './http/errorHandler.ts';
import { health } from './http/health.ts';
import { openApiDocument } from './http/openapi.ts';
import { requestLog } from './http/requestLog.ts';
import { securityHeaders } from './http/securityHeaders.ts';
import { endpoints } from './routes.ts';
import type { Services } from './services.ts';

const CLIENT = fileURLToPath(new URL('../dist/client', import.meta.url));

/** The whole server as Express knows it, not listening yet. */
export function createApp(services: Services, options: { clientDir?: string } = {}): Express {
  const app = express();
  app.disable('x-powered-by');
  app.disable('etag');
  app.set('query parser', 'simple');
  app.set('trust proxy', services.config.trustProxy ?? false);
  app.use(requestLog(services));
  app.use(securityHeaders());
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
  router.use(dispatch(services, endpoints));
  return router;
}

/** The built client: hashed assets for a year, the page itself never kept. */
function client(app: Express, dir: string): void {
  if (!existsSync(dir)) return;
  app.use('/assets', express.static(`${dir}/assets`, { immutable: true, maxAge: '365d', etag: false }));
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
