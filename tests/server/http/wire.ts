import { Agent, createServer, type IncomingHttpHeaders, request, type Server } from 'node:http';
import { connect } from 'node:net';
import jwt from 'jsonwebtoken';
import { afterAll, beforeAll } from 'vitest';
import type { AnyContract } from '../../../server/http/reply.ts';
import { csrfToken, SESSION_COOKIE } from '../../../server/http/session.ts';
import type { TestApp } from '../../support/app.ts';

export interface Answer {
  readonly status: number;
  readonly headers: IncomingHttpHeaders;
  readonly text: string;
  /** Its problem code, where it is a problem. */
  readonly code: string | undefined;
}

export interface Asked {
  readonly headers?: Record<string, string>;
  readonly body?: string | Buffer;
  /** Whose session, for the record only. */
  readonly sessionId?: string;
  /** False where a test asks so much that its answers cannot all be kept. */
  readonly recorded?: boolean;
}

/** The application behind a real socket, for requests that no client of ours would send. */
export function wire(test: TestApp) {
  const held: { server?: Server } = {};
  const agent = new Agent({ keepAlive: true, maxSockets: 16 });
  beforeAll(async () => {
    const server = createServer(test.app);
    held.server = server;
    await new Promise<void>((ready) => server.listen(0, '127.0.0.1', ready));
  });
  afterAll(async () => {
    agent.destroy();
    await new Promise((done) => held.server?.close(done));
  });
  const port = (): number => {
    const bound = held.server?.address();
    if (!bound || typeof bound === 'string') throw new Error('The server listens inside a test');
    return bound.port;
  };

  return {
    ask(
      method: string,
      path: string,
      { headers = {}, body, sessionId, recorded = true }: Asked = {},
    ): Promise<Answer> {
      return new Promise((resolve, reject) => {
        const length: Record<string, string> =
          body === undefined ? {} : { 'Content-Length': String(Buffer.byteLength(body)) };
        const asking = request({
          host: '127.0.0.1',
          port: port(),
          agent,
          method,
          path,
          headers: { ...length, ...headers },
        });
        asking.once('error', reject);
        asking.once('response', (response) => {
          const parts: Buffer[] = [];
          response.on('data', (part: Buffer) => parts.push(part));
          response.once('error', reject);
          response.once('end', () => {
            const text = Buffer.concat(parts).toString('latin1');
            const status = response.statusCode ?? 0;
            if (recorded) test.recorded.push({ sessionId: sessionId ?? null, method, path, status, text });
            const code = /"code":"(\w+)"/.exec(text)?.[1];
            resolve({ status, headers: response.headers, text, code });
          });
        });
        asking.end(body);
      });
    },

    /** Sends these very octets and answers what comes back until the connection ends. */
    raw(octets: string): Promise<string> {
      return new Promise((resolve, reject) => {
        const socket = connect(port(), '127.0.0.1', () => socket.end(octets, 'latin1'));
        let text = '';
        socket.setEncoding('latin1');
        socket.on('data', (part: string) => (text += part));
        socket.once('error', reject);
        socket.once('close', () => resolve(text));
      });
    },
  };
}

/** A session cookie as the server makes it, with what a test wants different. */
export function sessionCookie(test: TestApp, sessionId: string): string {
  const { current, keys } = test.services.config.sessionKeys;
  const token = jwt.sign({ sid: sessionId }, keys.get(current) ?? '', {
    algorithm: 'HS256',
    keyid: current,
    audience: 'quayword-session',
    expiresIn: 43_200,
  });
  return `${SESSION_COOKIE}=${token}`;
}

/** Everything our own page sends along with a change. */
export function ownPage(test: TestApp, sessionId: string | null): Record<string, string> {
  return {
    Origin: test.origin,
    'Sec-Fetch-Site': 'same-origin',
    'Content-Type': 'application/json',
    ...(sessionId === null
      ? {}
      : {
          Cookie: sessionCookie(test, sessionId),
          'X-Quayword-CSRF': csrfToken(test.services.config, sessionId),
        }),
  };
}

/** A route's address with these identifiers in its places. */
export const address = (contract: AnyContract, ids: Record<string, string>): string =>
  `/api${contract.path.replace(/:(\w+)/g, (_all: string, name: string) => ids[name] ?? NOBODY)}`;

/** An identifier that nothing has. */
export const NOBODY = '00000000-0000-4000-8000-000000000000';
