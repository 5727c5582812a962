import { type KeyboardEvent, useRef } from 'react';

const STEPS: Readonly<Record<string, number>> = { ArrowDown: 1, ArrowUp: -1 };
const ROW = '[data-row]:not([disabled])';

/**
 * Arrow keys in a list: put `ref` and `onKeyDown` on the container and `data-row` on each focusable row. Up and
 * Down move by one, Home and End to the ends. Rows stay in the tab order, so nothing is reachable by arrows only.
 */
export function useRoving<E extends HTMLElement>() {
  const ref = useRef<E>(null);
  const onKeyDown = (event: KeyboardEvent<E>) => {
    if (event.altKey || event.ctrlKey || event.metaKey) return;
    const target = event.target;
    if (target instanceof HTMLInputElement || target instanceof HTMLSelectElement) return;
    const rows = [...(ref.current?.querySelectorAll<HTMLElement>(ROW) ?? [])];
    const current = rows.findIndex((row) => row.contains(document.activeElement));
    const step = STEPS[event.key];
    let next: HTMLElement | undefined;
    if (step !== undefined) next = current < 0 ? rows[0] : rows[current + step];
    else if (event.key === 'Home') next = rows[0];
    else if (event.key === 'End') next = rows.at(-1);
    else return;
    event.preventDefault();
    next?.focus();
    next?.scrollIntoView({ block: 'nearest' });
  };
  return { ref, onKeyDown };
}
