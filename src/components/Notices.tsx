import {
  createContext,
  type ReactNode,
  useCallback,
  useContext,
  useEffect,
  useMemo,
  useRef,
  useState,
} from 'react';
import { UNDO_SECONDS } from '../../shared/rules/limits.ts';

interface Notice {
  id: number;
  text: ReactNode;
  /** Seconds it stays. */
  seconds: number;
  undo?: { label: string; run: () => void };
}

interface Notices {
  /** Says something that needs no answer; gone after six seconds. */
  say: (text: ReactNode) => void;
  /** Says what was done and offers to take it back for ten seconds. */
  undoable: (text: ReactNode, undo: () => void, label?: string) => void;
}

const Context = createContext<Notices | null>(null);

/** The way to tell the person what happened. */
export function useNotices(): Notices {
  const notices = useContext(Context);
  if (!notices) throw new Error('useNotices needs NoticesProvider above it');
  return notices;
}

/** Holds the bar at the foot of the window. Only the latest notice is shown; a newer one takes its place. */
export function NoticesProvider({ children }: { children: ReactNode }) {
  const [notice, setNotice] = useState<Notice | null>(null);
  const next = useRef(0);

  const show = useCallback((made: Omit<Notice, 'id'>) => {
    next.current += 1;
    setNotice({ ...made, id: next.current });
  }, []);
  const notices = useMemo<Notices>(
    () => ({
      say: (text) => show({ text, seconds: 6 }),
      undoable: (text, run, label = 'Undo') => show({ text, seconds: UNDO_SECONDS, undo: { label, run } }),
    }),
    [show],
  );
  const close = useCallback((id: number) => setNotice((now) => (now?.id === id ? null : now)), []);

  return (
    <Context value={notices}>
      {children}
      <div
        role="status"
        aria-live="polite"
        className="pointer-events-none fixed inset-x-0 bottom-0 z-20 flex justify-center p-3"
      >
        {notice ? <Bar key={notice.id} notice={notice} onClose={close} /> : null}
      </div>
    </Context>
  );
}

function Bar({ notice, onClose }: { notice: Notice; onClose: (id: number) => void }) {
  const { id, seconds, undo, text } = notice;
  const [left, setLeft] = useState(seconds);
  useEffect(() => {
    const until = Date.now() + seconds * 1_000;
    const timer = setInterval(() => {
      const remaining = Math.ceil((until - Date.now()) / 1_000);
      if (remaining <= 0) onClose(id);
      else setLeft(remaining);
    }, 250);
    return () => clearInterval(timer);
  }, [id, seconds, onClose]);

  return (
    <div className="pointer-events-auto flex max-w-full items-center gap-3 rounded-md bg-fill py-1 pr-1.5 pl-4 text-on-fill motion-safe:animate-arrive">
      <span className="py-2">{text}</span>
      {undo ? (
        <button
          type="button"
          className="flex min-h-12 items-center gap-2 rounded-md border border-on-fill px-4 font-medium whitespace-nowrap focus-visible:outline-on-fill"
          onClick={() => {
            onClose(id);
            undo.run();
          }}
        >
          {undo.label}
          <span aria-hidden="true" className="w-[2ch] text-right font-light">
            {left}
          </span>
        </button>
      ) : (
        <button
          type="button"
          className="min-h-11 px-3 text-sm underline underline-offset-4 focus-visible:outline-on-fill"
          onClick={() => onClose(id)}
        >
          Close
        </button>
      )}
    </div>
  );
}
