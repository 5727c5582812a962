import { useEffect } from 'react';

/** Names the page in the browser's tab: "Networks · Tamarisk · Quayword". Empty parts are left out. */
export function useTitle(...parts: readonly (string | undefined)[]): void {
  const title = [...parts, 'Quayword'].filter(Boolean).join(' · ');
  useEffect(() => {
    document.title = title;
  }, [title]);
}
