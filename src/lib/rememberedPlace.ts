let wanted: string | null = null;

/** Remembers, in this tab only, where somebody was going before they had to sign in. */
export function rememberPlace(path: string): void {
  wanted = path;
}

/** Where to go after signing in, once. Only ever an address this app itself was on, so nobody can plant one. */
export function takeRememberedPlace(): string {
  const place = wanted ?? '/';
  wanted = null;
  return place;
}
