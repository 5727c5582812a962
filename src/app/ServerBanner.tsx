import { useServerState } from '../lib/serverState.ts';

/** Says that the server cannot be reached, for as long as it cannot. */
export function ServerBanner() {
  const away = useServerState() === 'away';
  return (
    <div role="status" aria-live="polite">
      {away ? (
        <p className="border-b border-magenta bg-wash px-4 py-2 text-center text-sm text-ink sm:px-8">
          Quayword cannot reach its server just now. What you see may be old; it carries on by itself as soon
          as it can.
        </p>
      ) : null}
    </div>
  );
}
