import { useEffect, useRef } from 'react';

/** Brings the first field that needs another look into view and focus, each time a new error arrives. Put the ref on the form. */
export function useFocusInvalid<E extends HTMLElement = HTMLFormElement>(error: unknown) {
  const form = useRef<E>(null);
  useEffect(() => {
    if (error) form.current?.querySelector<HTMLElement>('[aria-invalid="true"]')?.focus();
  }, [error]);
  return form;
}
