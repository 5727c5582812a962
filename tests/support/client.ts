import { randomUUID } from 'node:crypto';
import jwt from 'jsonwebtoken';
import supertest, { type Test } from 'supertest';
import { csrfToken, SESSION_COOKIE } from '../../server/http/session.ts';
import type { TestApp } from './app.ts';

/** Requests as a browser of ours would send them, for one session or for nobody. */
export class Client {
  constructor(
    private readonly test: TestApp,
    private readonly sessionId: string | null,
  ) {}

  private cookie(): string {
    const { config } = this.test.services;
    const kid = config.sessionKeys.current;
    const secret = config.sessionKeys.keys.get(kid);
    if (!secret || !this.sessionId) return '';
    const token = jwt.sign({ sid: this.sessionId }, secret, {
      algorithm: 'HS256',
      keyid: kid,
      audience: 'quayword-session',
      expiresIn: 43_200,
    });
    return `${SESSION_COOKIE}=${token}`;
  }

  private dress(request: Test, changes: boolean): Test {
    request.on('response', (response) => {
      this.test.recorded.push({
        sessionId: this.sessionId,
        method: request.method,
        path: request.url.replace(/^https?:\/\/[^/]+/, ''),
        status: response.status,
        text: Buffer.isBuffer(response.body)
          ? response.body.toString('latin1')
          : (response.text ?? JSON.stringify(response.body)),
      });
    });
    if (this.sessionId) request.set('Cookie', this.cookie());
    if (changes) {
      request
        .set('Origin', this.test.origin)
        .set('Sec-Fetch-Site', 'same-origin')
        .set('Idempotency-Key', randomUUID());
      if (this.sessionId)
        request.set('X-Quayword-CSRF', csrfToken(this.test.services.config, this.sessionId));
    }
    return request;
  }

  get(path: string): Test {
    return this.dress(supertest(this.test.app).get(`/api${path}`), false);
  }
  post(path: string, body: object = {}): Test {
    return this.dress(supertest(this.test.app).post(`/api${path}`), true).send(body);
  }
  put(path: string, body: object = {}): Test {
    return this.dress(supertest(this.test.app).put(`/api${path}`), true).send(body);
  }
  patch(path: string, body: object = {}): Test {
    return this.dress(supertest(this.test.app).patch(`/api${path}`), true).send(body);
  }
  delete(path: string): Test {
    return this.dress(supertest(this.test.app).delete(`/api${path}`), true);
  }
}

export const anonymousClient = (test: TestApp) => new Client(test, null);
