import { createServer } from 'node:http';
import { createServer as createProbe } from 'node:net';
import type { Logger } from 'pino';
import { readConfig } from '../../server/config.ts';
import type { Clock } from '../../server/services.ts';
import { type Running, startServer } from '../../server/start.ts';

/** A port of loopback that nothing listens on just now. */
export function freePort(): Promise<number> {
  return new Promise((resolve, reject) => {
    const probe = createProbe();
    probe.once('error', reject);
    probe.listen(0, '127.0.0.1', () => {
      const address = probe.address();
      probe.close(() =>
        typeof address === 'object' && address ? resolve(address.port) : reject(new Error('no port')),
      );
    });
  });
}

/** The whole server on a free port of loopback, as `npm start` runs it, with these settings. */
export async function serve(
  env: NodeJS.ProcessEnv,
  options: { clock?: Clock; log?: Logger } = {},
): Promise<Running & { origin: string }> {
  const port = await freePort();
  const origin = `http://localhost:${port}`;
  const running = await startServer(readConfig({ ...env, PORT: String(port), PUBLIC_URL: origin }), {
    createServer,
    ...options,
  });
  return { ...running, origin };
}
