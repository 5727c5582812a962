import type { Problem } from '../../shared/api/common.ts';
import { keyFor, noteAnswered, noteUnanswered, requestDigest } from './actionKeys.ts';
import { noteServerDate } from './clock.ts';
import { ApiError, AwayError } from './errors.ts';
import { serverIsAway } from './serverState.ts';

export type Method = 'GET' | 'POST' | 'PUT' | 'PATCH' | 'DELETE';
type QueryValue = string | number | boolean | null | undefined;

interface Options {
  /** Appended to the path; null, undefined and empty values are left out. */
  query?: Readonly<Record<string, QueryValue>>;
  /** Sent as JSON, or as it is when it is a file or a form. */
  body?: unknown;
  signal?: AbortSignal;
  /** Repeats of one deliberate action carry the same key, so that it happens once. Chosen by `keyFor` when absent. */
  actionKey?: string;
}

let csrf: string | null = null;
let confirmIdentity: (() => Promise<boolean>) | null = null;
let signedOut: (() => void) | null = null;

/** Keeps the session's token for the `X-Quayword-CSRF` header, in memory only. */
export function keepCsrf(value: string | null): void {
  csrf = value;
}

/** Registers who asks the person to confirm it is them; it resolves to true once the server has accepted. */
export function onStepUp(handler: (() => Promise<boolean>) | null): void {
  confirmIdentity = handler;
}

/** Registers what happens when the server says nobody is signed in any more. */
export function onSignedOut(handler: (() => void) | null): void {
  signedOut = handler;
}

function address(path: string, query: Options['query']): string {
  const url = new URL(`/api${path}`, window.location.origin);
  for (const [key, value] of Object.entries(query ?? {})) {
    if (value !== null && value !== undefined && value !== '') url.searchParams.set(key, String(value));
  }
  return url.pathname + url.search;
}

function isBinary(body: unknown): body is Blob | FormData {
  return body instanceof Blob || body instanceof FormData;
}

function headersFor(method: Method, body: unknown, actionKey: string): Headers {
  const headers = new Headers({ Accept: 'application/json, application/problem+json' });
  if (method !== 'GET') {
    headers.set('Idempotency-Key', actionKey);
    if (csrf !== null) headers.set('X-Quayword-CSRF', csrf);
  }
  if (body instanceof Blob) headers.set('Content-Type', body.type || 'application/octet-stream');
  else if (body !== undefined && !isBinary(body)) headers.set('Content-Type', 'application/json');
  return headers;
}

async function problemOf(response: Response): Promise<ApiError> {
  const wait = Number(response.headers.get('Retry-After'));
  const retryAfter = Number.isFinite(wait) && wait > 0 ? wait : undefined;
  const problem = (await response.json().catch(() => ({}))) as Partial<Problem>;
  return new ApiError(problem, response.status, retryAfter);
}

async function once(method: Method, path: string, options: Options, actionKey: string): Promise<Response> {
  const { body } = options;
  let response: Response;
  try {
    response = await fetch(address(path, options.query), {
      method,
      credentials: 'same-origin',
      cache: 'no-store',
      headers: headersFor(method, body, actionKey),
      body: body === undefined ? undefined : isBinary(body) ? body : JSON.stringify(body),
      signal: options.signal,
    });
  } catch (error) {
    if (options.signal?.aborted) throw error;
    serverIsAway();
    throw new AwayError(method !== 'GET');
  }
  noteServerDate(response.headers.get('Date'), Date.now());
  if (response.ok) return response;
  const problem = await problemOf(response);
  // A gateway without a server, or a server without its database (503 that says when to come back), counts as
  // away. Any other 503, such as a log that cannot be written, is an answer with its own sentence.
  const noServer = problem.code === 'unknown' && [502, 503, 504].includes(response.status);
  const noDatabase = problem.code === 'unavailable' && problem.retryAfter !== undefined;
  if (noServer || noDatabase) {
    serverIsAway();
    throw new AwayError(method !== 'GET');
  }
  throw problem;
}

/** Another tab may have proved who it is, which renews the session's token for all tabs. True when it had changed. */
async function renewCsrf(): Promise<boolean> {
  const before = csrf;
  const response = await once('GET', '/session', {}, '').catch(() => null);
  const session = (await response?.json()) as { csrf: string } | undefined;
  if (session) csrf = session.csrf;
  return session !== undefined && csrf !== before;
}

async function send(method: Method, path: string, options: Options): Promise<Response> {
  const actionKey = options.actionKey ?? crypto.randomUUID();
  try {
    return await once(method, path, options, actionKey);
  } catch (error) {
    if (!(error instanceof ApiError)) throw error;
    if (error.code === 'step_up' && confirmIdentity && (await confirmIdentity())) {
      return await once(method, path, options, actionKey);
    }
    if (error.code === 'bad_origin' && method !== 'GET' && (await renewCsrf())) {
      return await once(method, path, options, actionKey);
    }
    if (error.code === 'not_signed_in') signedOut?.();
    throw error;
  }
}

async function change(method: Method, path: string, options: Options): Promise<Response> {
  if (options.actionKey !== undefined || isBinary(options.body)) return send(method, path, options);
  const digest = await requestDigest(method, path, options.body);
  const actionKey = keyFor(digest);
  try {
    const response = await send(method, path, { ...options, actionKey });
    noteAnswered(digest);
    return response;
  } catch (error) {
    if (error instanceof ApiError) noteAnswered(digest);
    else noteUnanswered(digest, actionKey);
    throw error;
  }
}

async function json<T>(response: Response): Promise<T> {
  const text = await response.text();
  // Something made (201) may be answered without content, as 204 always is (RFC 9110 sections 15.3.2 and 15.3.5).
  return (text === '' ? undefined : JSON.parse(text)) as T;
}

/** Reads JSON. Throws `ApiError` on a refusal, `AwayError` when nobody answers. */
export async function apiGet<T>(path: string, options: Omit<Options, 'body' | 'actionKey'> = {}): Promise<T> {
  return json<T>(await send('GET', path, options));
}

/**
 * Changes something and reads the JSON answered, if any. A 403 `step_up` asks the person to confirm it is them
 * and then repeats the request with the same key. Throws `ApiError` or `AwayError`.
 */
export async function apiSend<T = void>(
  method: Exclude<Method, 'GET'>,
  path: string,
  body?: unknown,
  options: Omit<Options, 'body'> = {},
): Promise<T> {
  return json<T>(await change(method, path, { ...options, body }));
}

function fileName(response: Response, fallback: string): string {
  const header = response.headers.get('Content-Disposition') ?? '';
  return /filename="([^"]+)"/.exec(header)?.[1] ?? fallback;
}

/** Fetches a file and hands it to the browser to save. The bytes are kept nowhere else. */
export async function apiDownload(
  method: 'GET' | 'POST',
  path: string,
  options: Options & { fallbackName: string },
): Promise<void> {
  const response = await send(method, path, options);
  const url = URL.createObjectURL(await response.blob());
  const link = document.createElement('a');
  link.href = url;
  link.download = fileName(response, options.fallbackName);
  link.click();
  setTimeout(() => URL.revokeObjectURL(url), 10_000);
}
