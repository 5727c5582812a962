import { keepCsrf } from './api.ts';
import { queryClient } from './queryClient.ts';

const tabs = new BroadcastChannel('quayword.session');

/**
 * Goes to the sign-in page and forgets everything fetched for the person who was signed in. In this order: the page
 * that is left still reads what is forgotten.
 */
export async function goAndForget(go: () => void | Promise<void>): Promise<void> {
  keepCsrf(null);
  await go();
  queryClient.clear();
}

/** Tells the person's other tabs that the session has ended. */
export function tellOtherTabs(): void {
  tabs.postMessage('signed-out');
}

/** Calls back when another tab has signed out; returns the way to stop. */
export function whenOtherTabSignsOut(listener: () => void): () => void {
  tabs.addEventListener('message', listener);
  return () => tabs.removeEventListener('message', listener);
}
