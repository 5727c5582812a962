import { useCallback, useEffect, useRef, useState } from 'react';
import { REVEAL_SECONDS } from '../../shared/rules/limits.ts';

type Stage<T> =
  | { kind: 'hidden' }
  | { kind: 'fetching' }
  | { kind: 'shown'; value: T; left: number }
  | { kind: 'failed'; error: unknown };

/**
 * Holds something secret for 30 seconds. It is fetched on `show`, and gone from the page and from memory on
 * `hide`, after the time, when the page is hidden for good (`pagehide`, which also covers the back-forward cache),
 * and when the component leaves.
 */
export function useSecret<T>(fetchSecret: () => Promise<T>, seconds: number = REVEAL_SECONDS) {
  const [stage, setStage] = useState<Stage<T>>({ kind: 'hidden' });
  const turn = useRef(0);

  const hide = useCallback(() => {
    turn.current += 1;
    setStage({ kind: 'hidden' });
  }, []);

  const show = useCallback(async () => {
    turn.current += 1;
    const mine = turn.current;
    setStage({ kind: 'fetching' });
    try {
      const value = await fetchSecret();
      if (turn.current === mine) setStage({ kind: 'shown', value, left: seconds });
    } catch (error) {
      if (turn.current === mine) setStage({ kind: 'failed', error });
    }
  }, [fetchSecret, seconds]);

  const shown = stage.kind === 'shown';
  useEffect(() => {
    if (!shown) return;
    const until = Date.now() + seconds * 1_000;
    const tick = setInterval(() => {
      const left = Math.ceil((until - Date.now()) / 1_000);
      if (left <= 0) hide();
      else setStage((stage) => (stage.kind === 'shown' ? { ...stage, left } : stage));
    }, 500);
    window.addEventListener('pagehide', hide);
    return () => {
      clearInterval(tick);
      window.removeEventListener('pagehide', hide);
    };
  }, [shown, seconds, hide]);

  useEffect(
    () => () => {
      turn.current += 1;
    },
    [],
  );

  return { stage, show, hide };
}
