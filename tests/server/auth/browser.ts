import { createHmac } from 'node:crypto';
import { Agent } from 'node:http';
import supertest, { type Response } from 'supertest';
import { hashPassword } from '../../../server/auth/passwords.ts';
import { DEVICE_COOKIE, SESSION_COOKIE } from '../../../server/http/session.ts';
import type { TestApp } from '../../support/app.ts';

type Method = 'get' | 'post' | 'put' | 'patch' | 'delete';

/** A browser that keeps its cookies and its session's token, at an address of its own (127.0.0.0/8 is all ours). */
export class Browser {
  readonly cookies = new Map<string, string>();
  private csrf: string | null = null;

  constructor(
    private readonly test: TestApp,
    private readonly given: { address?: string; userAgent?: string } = {},
  ) {}

  get signedIn(): boolean {
    return this.cookies.has(SESSION_COOKIE);
  }

  get sessionCookie(): string {
    return this.cookies.get(SESSION_COOKIE) ?? '';
  }

  /** A copy of this browser's cookies in another, as a thief would have it. */
  stolen(): Browser {
    const other = new Browser(this.test, this.given);
    for (const [name, value] of this.cookies) other.cookies.set(name, value);
    return other;
  }

  /** The same machine with only its memory of having signed in before. */
  laterVisit(): Browser {
    const other = this.stolen();
    other.cookies.delete(SESSION_COOKIE);
    return other;
  }

  get knownAs(): string | undefined {
    return this.cookies.get(DEVICE_COOKIE);
  }

  async get(path: string): Promise<Response> {
    return this.ask('get', path);
  }
  async post(path: string, body: object = {}): Promise<Response> {
    return this.ask('post', path, body);
  }
  async put(path: string, body: object = {}): Promise<Response> {
    return this.ask('put', path, body);
  }
  async patch(path: string, body: object = {}): Promise<Response> {
    return this.ask('patch', path, body);
  }
  async delete(path: string, body?: object): Promise<Response> {
    return this.ask('delete', path, body);
  }

  async signIn(email: string, password: string, code?: string): Promise<Response> {
    return this.post('/session', { email, password, ...(code === undefined ? {} : { code }) });
  }

  private async ask(method: Method, path: string, body?: object): Promise<Response> {
    const changes = method !== 'get';
    if (changes && this.signedIn && this.csrf === null) {
      const session = await this.get('/session');
      this.csrf = typeof session.body?.csrf === 'string' ? session.body.csrf : null;
    }
    const request = supertest(this.test.app)[method](`/api${path}`);
    if (this.given.address) {
      request.agent(
        new Agent({ localAddress: this.given.address } as ConstructorParameters<typeof Agent>[0]),
      );
    }
    if (this.given.userAgent) request.set('User-Agent', this.given.userAgent);
    if (this.cookies.size > 0) {
      request.set('Cookie', [...this.cookies].map(([name, value]) => `${name}=${value}`).join('; '));
    }
    if (changes) {
      request.set('Origin', this.test.origin).set('Sec-Fetch-Site', 'same-origin');
      if (this.csrf) request.set('X-Quayword-CSRF', this.csrf);
    }
    const response = await (body === undefined ? request : request.send(body));
    this.test.recorded.push({
      sessionId: null,
      method: method.toUpperCase(),
      path: `/api${path}`,
      status: response.status,
      text: response.text ?? '',
    });
    for (const line of setCookies(response)) this.keep(line);
    return response;
  }

  private keep(line: string): void {
    const [, name, value] = /^([^=]+)=([^;]*)/.exec(line) ?? [];
    if (name === undefined || value === undefined) return;
    if (name === SESSION_COOKIE) this.csrf = null;
    if (value === '') this.cookies.delete(name);
    else this.cookies.set(name, value);
  }
}

/** The Set-Cookie lines of an answer. */
export function setCookies(response: Response): string[] {
  const lines: unknown = response.headers['set-cookie'];
  return Array.isArray(lines) ? lines.map(String) : [];
}

/** Hashing is slow on purpose, so the same password is hashed once a file. */
const hashes = new Map<string, Promise<string>>();

/** Gives a person of the factories a password. */
export async function setPassword(test: TestApp, personId: string, password: string): Promise<void> {
  const known = hashes.get(password) ?? hashPassword(test.services.config, password);
  hashes.set(password, known);
  const hash = await known;
  await sql(test, 'UPDATE people SET password_hash = $hash WHERE id = $id', { id: personId, hash });
}

export async function sql<T extends object = Record<string, unknown>>(
  test: TestApp,
  text: string,
  bind: Record<string, unknown> = {},
): Promise<T[]> {
  return test.services.db.transaction({ kind: 'system' }, (tx) => test.services.db.run<T>(tx, text, bind));
}

/** Base32 of RFC 4648 section 6, by hand. */
export function fromBase32(text: string): Buffer {
  const bits = [...text.replace(/=+$/, '')]
    .map((letter) => 'ABCDEFGHIJKLMNOPQRSTUVWXYZ234567'.indexOf(letter).toString(2).padStart(5, '0'))
    .join('');
  return Buffer.from((bits.match(/.{8}/g) ?? []).map((octet) => Number.parseInt(octet, 2)));
}

/** HOTP of RFC 4226 section 5.3 by hand, so that our library is checked by something else. */
export function hotp(key: Buffer, counter: number, digits = 6): string {
  const moving = Buffer.alloc(8);
  moving.writeBigUInt64BE(BigInt(counter));
  const mac = createHmac('sha1', key).update(moving).digest();
  const offset = (mac.at(-1) ?? 0) & 0x0f;
  return String((mac.readUInt32BE(offset) & 0x7fffffff) % 10 ** digits).padStart(digits, '0');
}

/** The six digits an authenticator app shows at an instant. */
export const codeAt = (secret: string, at: Date, stepsOff = 0): string =>
  hotp(fromBase32(secret), Math.floor(at.getTime() / 30_000) + stepsOff);
