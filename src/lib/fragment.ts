/**
 * The token of a mailed link, kept behind `#` so that it reaches no server log, and taken out of the address bar
 * at once (R27). Empty when the link was cut off.
 */
export function takeFragmentToken(): string {
  const token = window.location.hash.slice(1);
  if (token) window.history.replaceState(window.history.state, '', window.location.pathname);
  return token;
}
