/** Keys of changes that went out and got no answer, by what was asked. In memory only, as digests. */
const unanswered = new Map<string, string>();

/** What tells one request from another: its method, path and body, as a digest so that no content is kept. */
export async function requestDigest(method: string, path: string, body: unknown): Promise<string> {
  const text = `${method} ${path}\n${body === undefined ? '' : JSON.stringify(body)}`;
  const digest = await crypto.subtle.digest('SHA-256', new TextEncoder().encode(text));
  return Array.from(new Uint8Array(digest), (octet) => octet.toString(16).padStart(2, '0')).join('');
}

/**
 * The idempotency key of a change: a fresh one, unless the very same change went out before and nobody answered.
 * Then it may have happened, and the same key keeps it from happening twice.
 */
export function keyFor(digest: string): string {
  return unanswered.get(digest) ?? crypto.randomUUID();
}

/** Nobody answered: the next identical change carries the same key. */
export function noteUnanswered(digest: string, key: string): void {
  unanswered.set(digest, key);
}

/** The server answered, one way or the other. */
export function noteAnswered(digest: string): void {
  unanswered.delete(digest);
}
