import { useSyncExternalStore } from 'react';

type ServerState = 'here' | 'away';

let state: ServerState = 'here';
let timer: ReturnType<typeof setTimeout> | undefined;
const listeners = new Set<() => void>();
const onReturn = new Set<() => void>();

function set(next: ServerState): void {
  if (state === next) return;
  state = next;
  for (const listener of listeners) listener();
}

async function ask(delayMs: number): Promise<void> {
  try {
    const answer = await fetch('/api/health', { cache: 'no-store', credentials: 'same-origin' });
    if (answer.ok) {
      timer = undefined;
      set('here');
      for (const listener of onReturn) listener();
      return;
    }
  } catch {
    // Still away: ask again below.
  }
  plan(Math.min(delayMs * 1.5, 15_000));
}

function plan(delayMs: number): void {
  timer = setTimeout(() => void ask(delayMs), delayMs);
}

/** Called when a request found nobody: shows the banner and asks `/api/health` until it answers. */
export function serverIsAway(): void {
  set('away');
  if (timer === undefined) plan(1_500);
}

/** Calls back each time the server has come back after being away; returns the way to stop. */
export function whenServerReturns(listener: () => void): () => void {
  onReturn.add(listener);
  return () => onReturn.delete(listener);
}

/** `away` from the first request that found nobody until the health check answers. */
export function useServerState(): ServerState {
  return useSyncExternalStore(
    (listener) => {
      listeners.add(listener);
      return () => listeners.delete(listener);
    },
    () => state,
  );
}
