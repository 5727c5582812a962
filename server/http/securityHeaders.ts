import type { IncomingMessage } from 'node:http';
import type { RequestHandler } from 'express';
import helmet from 'helmet';

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

/** What helmet sets with our settings. None of it depends on the request, so it is asked once. */
function constantHeaders(): Map<string, string> {
  const headers = new Map<string, string>();
  const collect = {
    setHeader: (name: string, value: string) => headers.set(name, value),
    removeHeader: () => undefined,
  };
  helmet({
    contentSecurityPolicy: CONTENT_POLICY,
    crossOriginEmbedderPolicy: false,
    referrerPolicy: { policy: 'no-referrer' },
    strictTransportSecurity: { maxAge: 31_536_000, includeSubDomains: true },
    xFrameOptions: { action: 'deny' },
  })({} as IncomingMessage, collect as never, (error?: unknown) => {
    if (error) throw error;
  });
  headers.set('Permissions-Policy', 'camera=(), microphone=(), geolocation=(), payment=(), usb=()');
  return headers;
}

/** The security headers of every answer (OWASP Secure Headers Project). */
export function securityHeaders(): RequestHandler {
  const headers = [...constantHeaders()];
  return (_request, response, next) => {
    for (const [name, value] of headers) response.setHeader(name, value);
    next();
  };
}
